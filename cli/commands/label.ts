import type { Shop } from '../../shared/api/sessions.js';
import type { UnitPage } from '../../shared/api/units.js';
import { priceLabelOf, standingTagOf, stockLabelOf } from '../../shared/paper/label-content.js';
import type { PriceLabel, StockLabel } from '../../shared/paper/label-paper.js';
import { LARGEST_LABEL, readLabelSize, SMALLEST_LABEL, type LabelFormat, type LabelSize } from '../../shared/paper/sizes.js';
import { isLoopbackAddress, unitAddress } from '../../shared/paper/unit-address.js';
import { unitPage } from '../bench/unit-on-bench.js';
import type { Context } from '../context.js';
import { ServerUnreachableError, UsageError } from '../errors.js';
import { moneyText, parseMoney } from '../money.js';
import { checkPaperOptions, putOnPaper, wantsPaper, type PaperOptions } from '../print/put-on-paper.js';
import { printJson } from '../render/json.js';
import { dayText, unitLabel, unitNumberText } from '../render/words.js';
import { whoIsHere } from '../session.js';

export interface LabelOptions extends PaperOptions {
  number: number;
  kind: 'stock' | 'price';
  price?: string;
  grade?: string;
  format: LabelFormat;
  size?: string;
  code: 'qr' | 'bars';
  json?: boolean;
}

const GRADE_AT_MOST = 12;

/** A stock or price label of a unit. Needs no network where this bench has seen the unit before. */
export async function runLabel(options: LabelOptions, context: Context): Promise<number> {
  const { number, kind, json } = options;
  checkPaperOptions(options);
  if (!wantsPaper(options)) throw new UsageError('Say where the label is to go: --print, or --pdf FILE.');
  const size = sizeOf(options);
  checkKind(options);
  const me = await whoIsHere(context);
  const { value: page, offline } = await unitPage(context, number);
  const tag = kind === 'price' && offline ? standingTagOf(page) : undefined;
  // It may have been withdrawn since this bench saw it.
  if (tag !== undefined)
    throw new ServerUnreachableError(context.server, `nobody can say whether tag ${tag} still stands, so no label that names it is made`);
  if (offline) context.stderr.say(`The server at ${context.server} can't be reached: the label says what this bench knows from last time.`);
  const label = kind === 'stock' ? await stockLabel(page, options.code, context) : priceLabel(page, options, me.shop);
  const { labelPaper } = await import('../../shared/paper/label-paper.js');
  const sizeName = `${size.width} x ${size.height} mm`;
  const put = await putOnPaper(
    {
      paper: labelPaper(label, size),
      name: `${kind}-${unitNumberText(number)}-${size.width}x${size.height}`,
      options,
      what: `the ${kind} label is`,
      size: sizeName,
    },
    context,
  );
  const says = wordsOn(label);
  if (json === true) printJson(context, { unit: number, kind, size: { widthMm: size.width, heightMm: size.height }, says, ...put.answer });
  else context.stdout.write(`${says.map((line) => `  ${line}`).join('\n')}\n`);
  return put.code;
}

function sizeOf({ format, size }: LabelOptions): LabelSize {
  const read = readLabelSize(size ?? format);
  if (!read)
    throw new UsageError(
      `--size: '${size ?? format}' is no size of a label. Write width x height in mm, like 70x40: at least ${SMALLEST_LABEL.width}x${SMALLEST_LABEL.height}, at most ${LARGEST_LABEL.width}x${LARGEST_LABEL.height}.`,
    );
  return read;
}

function checkKind({ kind, price, grade }: LabelOptions): void {
  if (kind === 'price' && price === undefined) throw new UsageError('A price label needs its price: --price 129.00');
  if (kind === 'stock' && (price !== undefined || grade !== undefined))
    throw new UsageError('A stock label has no price and no grade: add --kind price, or leave them out.');
  if (grade !== undefined && (grade.trim() === '' || [...grade.trim()].length > GRADE_AT_MOST))
    throw new UsageError(`--grade: write a short one, like B: at most ${GRADE_AT_MOST} letters.`);
}

async function stockLabel(page: UnitPage, code: 'qr' | 'bars', context: Context): Promise<StockLabel> {
  const { code128Bars, qrModules } = await import('../render/paper-codes.js');
  const number = unitNumberText(page.unit.number);
  if (code === 'qr' && isLoopbackAddress(context.server))
    context.stderr.say(
      `The code on the label points to ${context.server}, which no phone can open: set REFETTLE_SERVER to the server's name on the network, or print --code bars.`,
    );
  const codes = { qr: qrModules(unitAddress(context.server, number)), bars: code128Bars(number), code };
  return stockLabelOf(page, { takenIn: dayText(page.unit.takenInAt), ...codes });
}

const priceLabel = (page: UnitPage, { price = '', grade }: LabelOptions, shop: Shop): PriceLabel =>
  priceLabelOf(page, { price: moneyText(parseMoney(price, shop.currency, '--price'), shop.currency), grade, shop });

/** What stands on the label, a line each. */
function wordsOn(label: StockLabel | PriceLabel): string[] {
  const machine = `${label.maker} ${label.model}, ${label.appliance}`;
  if (label.kind === 'stock')
    return [
      unitLabel(Number(label.number)),
      machine,
      label.serial === undefined ? 'serial unreadable' : `serial ${label.serial}`,
      ...(label.licensedOnly ? ['licensed person only'] : []),
      `in ${label.takenIn}`,
    ];
  return [
    `${label.price}${label.grade === undefined ? '' : `, grade ${label.grade}`}`,
    machine,
    `${unitLabel(Number(label.number))}, ${label.tag === undefined ? 'for parts only, no tag' : `readiness tag ${label.tag}`}`,
    `${label.shop.name}, ${label.shop.phone}`,
  ];
}
