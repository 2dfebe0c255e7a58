import type { TagPage } from '../../shared/api/tags.js';
import type { UnitPage } from '../../shared/api/units.js';
import type { RuleResult } from '../../shared/readiness/readiness.js';
import type { Verdict } from '../../shared/verdict.js';
import type { Style } from '../output.js';
import { cut, padRight, shown, spread, table, widthOf, wrap } from './columns.js';
import { verdictSign, verdictText } from './verdict.js';
import { dayText, timeText, unitLabel } from './words.js';

/** From the edge of the screen to where the tag's text begins, and what is left of it at the right. */
const LEFT = 8;
const INSET = 4;

/**
 * A tag with two slanted corners and a punched hole. Text lines stand inside, the last two at the lower slant.
 * At least six lines tall, so that the slants and the hole have room.
 */
function box(content: readonly string[], style: Style): string[] {
  const lines = [...content, ...Array.from({ length: Math.max(0, 4 - content.length) }, () => '')];
  const inner = style.columns - 1 - LEFT - 2;
  const edges = style.unicode
    ? { rise: '╱', fall: '╲', side: '│', line: '─', top: '┐', bottom: '┘', hole: '○' }
    : { rise: '/', fall: '\\', side: '|', line: '-', top: '.', bottom: "'", hole: 'o' };
  const hole = Math.floor(lines.length / 2);
  const rows = lines.map((line, index) => {
    const last = lines.length - 1;
    const edge = index === 0 ? `   ${edges.rise}` : index === last ? `    ${edges.fall}`.slice(1) : `  ${edges.side}`;
    const mark = index === hole ? ` ${edges.hole}` : '';
    return `${padRight(`${edge}${mark}`, LEFT)}${padRight(cut(shown(line, style), inner - INSET + 2), inner)}${edges.side}`;
  });
  return [
    `    ${edges.rise}${edges.line.repeat(LEFT + inner - 5)}${edges.top}`,
    ...rows,
    `    ${edges.fall}${edges.line.repeat(LEFT + inner - 5)}${edges.bottom}`,
  ];
}

const roomIn = (style: Style): number => style.columns - 1 - LEFT - INSET;

/** A rule that is met needs only its name; the others say what is missing and how to get it. */
const STATE_VERDICT: Readonly<Record<RuleResult['state'], Verdict>> = {
  met: 'pass',
  fail: 'fail',
  inconclusive: 'inconclusive',
  missing: 'not done',
};

/** The tag of a unit that is not ready: what is met, then what is missing and the way to get it. */
export function blankTagLines({ unit, stage, readiness }: Pick<UnitPage, 'unit' | 'stage' | 'readiness'>, style: Style): string[] {
  const room = roomIn(style);
  const met = readiness.rules
    .filter(({ state }) => state === 'met')
    .map(({ title, state }) => `${verdictSign(STATE_VERDICT[state], style)} ${title.toLowerCase()}`);
  const rows: string[] = [];
  for (const rule of met) {
    const last = rows.at(-1);
    if (last !== undefined && widthOf(last) + 2 + widthOf(rule) <= room) rows[rows.length - 1] = `${last}  ${rule}`;
    else rows.push(rule);
  }
  const open = readiness.rules
    .filter(({ state }) => state !== 'met')
    .sort((a, b) => Number(a.state === 'missing') - Number(b.state === 'missing'))
    .flatMap((rule) => {
      const [first = '', ...rest] = wrap(`${rule.title.toLowerCase()}: ${rule.evidence}`, room - 2);
      const how = rule.how === undefined ? [] : wrap(rule.how, room - 2);
      return [
        `${verdictSign(STATE_VERDICT[rule.state], style)} ${style.ink.bold(first)}`,
        ...[...rest.map((line) => style.ink.bold(line)), ...how].map((line) => `  ${line}`),
      ];
    });
  const title = spread(`${style.ink.bold(unitLabel(unit.number))}  ${stage}`, `${readiness.met} of ${readiness.total} rules met`, room);
  return box([title, ...rows, ...open], style);
}

/** A tag that stands, or stood. */
export function tagLines({ content, state, withdrawn, url }: TagPage, style: Style): string[] {
  const { ink } = style;
  const room = roomIn(style);
  const rule = (style.unicode ? '─' : '-').repeat(room);
  const serial = content.plate.serial === undefined ? 'serial unreadable' : `serial ${content.plate.serial}`;
  const rows = testedRows(content.tested, style, room);
  const head = withdrawn ? 'WITHDRAWN' : 'READY';
  const mended = content.mended.map(
    ({ part, source, at, by }) =>
      `Mended: ${part.toLowerCase()}, ${source === 'none' ? 'no part changed' : source}, ${dayText(at)}, by ${by}`,
  );
  return box(
    [
      spread(ink.bold(head) + (content.sample ? `   ${ink.bold('SAMPLE')}` : ''), ink.bold(`tag ${state.number}`), room),
      ...(content.sample ? wrap('Simulated results: this is no tag of a real machine.', room) : []),
      ...(withdrawn ? wrap(`Withdrawn ${dayText(withdrawn.at)}: ${withdrawn.reason}`, room) : []),
      ...wrap(`${content.plate.maker} ${content.plate.model}, ${content.appliance}, ${serial}`, room),
      rule,
      ...rows,
      rule,
      ...(mended.length > 0 ? mended.flatMap((line) => wrap(line, room)) : ['Nothing had to be mended']),
      ...wrap(
        `Signed off ${dayText(content.signedOffAt)}, ${timeText(content.signedOffAt)}, by ${content.signedOffBy}, lead${content.fourEyes ? '' : ', who worked on it too'}`,
        room,
      ),
      ...wrap(`Warranty ${content.warrantyMonths} months from the day of sale`, room),
      ...addressLines(shortUrl(url), `look-up word ${content.lookUpWord}`, room),
    ],
    style,
  );
}

/** Titles up to so many columns stand in a row with their figures; a longer one has a line of its own, its figures below it. */
const TITLE_COLUMNS = 20;

function testedRows(tested: TagPage['content']['tested'], style: Style, room: number): string[] {
  const inRow = (title: string): boolean => widthOf(title) <= TITLE_COLUMNS;
  const figures = tested.map(({ reading, spread: u = '', limit, verdict }) => [reading, u, limit, verdictText(verdict, style)]);
  const rows = table(
    tested.map(({ title }, index) => [inRow(title) ? title : '', ...(figures[index] ?? [])]),
    style,
    { gap: style.unicode ? 2 : 1 },
  );
  const narrow = rows.some((row) => widthOf(row) > room);
  return rows.flatMap((row, index) => {
    const { title } = tested[index] ?? { title: '' };
    // Nothing of a row is ever cut: where it has no room, its figures go below its title.
    if (narrow)
      return [
        ...wrap(title, room),
        ...inPieces(
          (figures[index] ?? []).map((piece) => shown(piece, style)),
          room,
        ),
      ];
    return [...(inRow(title) ? [] : wrap(title, room)), row];
  });
}

/** Pieces on as many lines as they need, each whole as long as it has room on a line of its own. */
function inPieces(pieces: readonly string[], room: number): string[] {
  const lines: string[] = [];
  for (const piece of pieces.filter(Boolean)) {
    const longer = [...lines.slice(-1), piece].join('  ');
    if (lines.length > 0 && widthOf(longer) <= room - 2) lines[lines.length - 1] = longer;
    else lines.push(...wrap(piece, room - 2));
  }
  return lines.map((line) => `  ${line}`);
}

/** An address, which has no blank to be broken at, and the look-up word behind it or below. */
function addressLines(address: string, word: string, room: number): string[] {
  const lines = address.match(new RegExp(`.{1,${room}}`, 'gu')) ?? [];
  const last = `${lines.at(-1) ?? ''}     ${word}`;
  return widthOf(last) <= room ? [...lines.slice(0, -1), last] : [...lines, ...wrap(word, room)];
}

/** The address without its signature, as somebody would type it. */
export function shortUrl(url: string): string {
  return url.replace(/^https?:\/\//, '').replace(/(\/t\/[^/]+)\/.*$/, '$1');
}
