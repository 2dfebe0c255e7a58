import type { TagPage } from '../../shared/api/tags.js';
import type { UnitPage } from '../../shared/api/units.js';
import { TAG_SHEETS, type TagFormat } from '../../shared/paper/sizes.js';
import { unitPage } from '../bench/unit-on-bench.js';
import type { Context } from '../context.js';
import { ApiProblemError } from '../errors.js';
import { EXIT, firstExitCode } from '../exit-codes.js';
import { checkPaperOptions, putOnPaper, wantsPaper, type PaperOptions, type PutOnPaper } from '../print/put-on-paper.js';
import { printJson } from '../render/json.js';
import { spread } from '../render/columns.js';
import { blankTagLines, tagLines } from '../render/tag-box.js';
import { plural, unitLabel, unitNumberText } from '../render/words.js';

export interface TagOptions extends PaperOptions {
  numbers: number[];
  format: TagFormat;
  json?: boolean;
}

/** A unit with the tag that stands, or with what is missing until it has one. */
type Found = { number: number; page: TagPage; stands: true } | { number: number; page: TagPage | undefined; stands: false; unit: UnitPage };

/** The readiness tags of units; for one without a tag that stands, what is missing and how to get it. */
export async function runTag({ numbers, format, json, ...paper }: TagOptions, context: Context): Promise<number> {
  checkPaperOptions(paper);
  const units: Found[] = [];
  for (const number of new Set(numbers)) units.push(await find(context, number));
  const put = wantsPaper(paper) ? await printThose(units, format, paper, context) : undefined;
  const code = firstExitCode([units.every(({ stands }) => stands) ? EXIT.good : EXIT.notGood, put?.code ?? EXIT.good]);
  if (json === true) {
    const [one, ...others] = units.map(inJson);
    printJson(context, { ...(others.length === 0 ? one : { units: [one, ...others] }), ...put?.answer });
  } else await show(units, code, context);
  return code;
}

async function find(context: Context, number: number): Promise<Found> {
  const page = await tagOf(context, number);
  if (page?.state.standing === 'stands') return { number, page, stands: true };
  return { number, page, stands: false, unit: (await unitPage(context, number)).value };
}

/** Those that stand go on paper; the others are named and left out: a blank page would pass for a tag. */
async function printThose(
  units: readonly Found[],
  format: TagFormat,
  options: PaperOptions,
  context: Context,
): Promise<PutOnPaper | undefined> {
  const left = units.filter(({ stands }) => !stands).map(({ number }) => unitLabel(number));
  const tags = units.flatMap((unit) => (unit.stands ? [unit.page] : []));
  if (left.length > 0)
    context.stderr.say(
      `${left.join(', ')} ${left.length === 1 ? 'has' : 'have'} no standing tag: ${tags.length === 0 ? 'no PDF was written' : 'left out'}.`,
    );
  if (tags.length === 0) return undefined;
  const [{ tagPaper }, { qrModules }, { dayText }] = await Promise.all([
    import('../../shared/paper/tag-paper.js'),
    import('../render/paper-codes.js'),
    import('../render/words.js'),
  ]);
  const paper = tagPaper(
    tags.map((tag) => ({ tag, qr: qrModules(tag.url) })),
    format,
    dayText,
  );
  const [first] = tags;
  const name =
    tags.length === 1 && first ? `tag-${first.content.tag}-${format}` : `tags-${unitNumberText(units[0]?.number ?? 0)}-and-more-${format}`;
  const what = tags.length === 1 ? 'the tag is' : `${plural(tags.length, 'tag')} are`;
  return putOnPaper({ paper, name, options, what, size: TAG_SHEETS[format].name }, context);
}

const inJson = (found: Found): object =>
  found.stands
    ? { unit: found.number, ready: true, tag: found.page }
    : { unit: found.number, ready: false, ...(found.page ? { tag: found.page } : {}), readiness: found.unit.readiness };

async function show(units: readonly Found[], code: number, { stdout }: Context): Promise<void> {
  const style = await stdout.style();
  for (const found of units) {
    if (found.stands) stdout.write(`\n${tagLines(found.page, style).join('\n')}\n\n`);
    else {
      if (found.page) stdout.write(`${tagLines(found.page, style).join('\n')}\n\n`);
      stdout.write(`${blankTagLines(found.unit, style).join('\n')}\n`);
    }
  }
  if (units.some(({ stands }) => stands))
    stdout.write(`${spread(' Says what this shop tested. Certifies no compliance.', `exit ${code}`, style.columns - 1)}\n`);
}

/** The newest tag; undefined for a unit that never had one. */
async function tagOf(context: Context, number: number): Promise<TagPage | undefined> {
  try {
    return await (await context.api()).call('getUnitTag', { params: { number } });
  } catch (error) {
    if (error instanceof ApiProblemError && error.status === 404) return undefined;
    throw error;
  }
}
