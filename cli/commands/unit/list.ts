import type { UnitRow } from '../../../shared/api/units.js';
import { stageSchema } from '../../../shared/readiness/stage.js';
import { keepUnits } from '../../bench/kept-units.js';
import type { Context } from '../../context.js';
import { UsageError } from '../../errors.js';
import { EXIT } from '../../exit-codes.js';
import { printJson } from '../../render/json.js';
import { table } from '../../render/columns.js';
import { unitNumberText } from '../../render/words.js';

export interface UnitListOptions {
  find?: string;
  stage?: string;
  limit?: number;
  json?: boolean;
}

/** As many as fit a screen or two; `--limit` asks for more. */
const USUAL_LIMIT = 50;
const LARGEST_PAGE = 200;

/** The units of the shop, newest first. */
export async function runUnitList({ find, stage, limit = USUAL_LIMIT, json }: UnitListOptions, context: Context): Promise<number> {
  if (stage !== undefined && !stageSchema.safeParse(stage).success)
    throw new UsageError(`--stage: '${stage}' is none of ${stageSchema.options.join(', ')}`);
  const api = await context.api();
  const rows: UnitRow[] = [];
  let next: string | undefined;
  do {
    const query = { find, stage, limit: Math.min(LARGEST_PAGE, limit - rows.length), cursor: next };
    const page = await api.call('listUnits', { query });
    rows.push(...page.items);
    next = page.next;
  } while (next !== undefined && rows.length < limit);

  if (find === undefined && stage === undefined && rows.length > 0) keepUnits(context.home, rows, context.now());
  if (json === true) {
    printJson(context, { items: rows, more: next !== undefined });
    return EXIT.good;
  }
  if (rows.length === 0) {
    context.stderr.write(
      find === undefined && stage === undefined ? 'No units are on the books. Take one in: refettle unit new\n' : 'No unit is like that.\n',
    );
    return EXIT.good;
  }
  const style = await context.stdout.style();
  const { ink } = style;
  const head = ['No.', 'Machine', 'Stage', 'Rules', 'Lamps', 'Waits for'].map((title) => ink.bold(title));
  const cells = rows.map((row) => [
    ink.bold(unitNumberText(row.number)),
    `${row.plate.maker} ${row.plate.model}`,
    row.stage,
    `${row.rulesMet} of ${row.rulesTotal}`,
    lampsText(row),
    row.waitsFor,
  ]);
  context.stdout.write(`${table([head, ...cells], style).join('\n')}\n`);
  if (next !== undefined) context.stderr.say(`There are more: ask with --limit ${limit * 2}, or look for some with --find.`);
  return EXIT.good;
}

function lampsText({ lamps }: UnitRow): string {
  return lamps.state === 'codes' ? [...new Set(lamps.codes.map(({ code }) => code))].join(', ') : lamps.state;
}
