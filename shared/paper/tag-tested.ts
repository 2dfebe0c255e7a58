import type { TagContent } from '../api/tags.js';
import { cutToWidth, layLines, SMALLEST_POINTS, type Pen } from './pen.js';
import { widthMm, type Face } from './type.js';

/** Where the columns of the tested list stand on a tag, in millimetres. */
export interface TestedColumns {
  left: number;
  right: number;
  titleWidth: number;
  readingRight: number;
  readingWidth: number;
  limit: number;
  limitWidth: number;
  mark: number;
}

const THICK = 0.7;
const THIN = 0.25;
const MOST_ROWS = 10;
const ROW_MM = 4.6;
/** Of a row with more lines: each in the smallest type, first baseline below the row's upper edge. */
const LINES = { first: 2.5, each: 2.7, around: 0.6 };
/** A title gets so many lines before it is cut. */
const MOST_TITLE_LINES = 4;
/** The line that says how many rows are overleaf. */
const MORE_OVERLEAF = 4;
const TITLE_POINTS = 8.5;
const MARK_MM = 3.1;
const PASS_MARK = 'M1 1H19V1.4L8.6 11.6 5.4 8.4 3.2 10.6 8.6 16 19 5.8V19H1z';

type Row = TagContent['tested'][number];

/** What a row says, as the lines of its cells; what has no room in its cell stands below, over the whole width. */
interface Laid {
  row: Row;
  title: readonly string[];
  reading: readonly string[];
  limit: readonly string[];
  below: readonly string[];
}

/**
 * What was tested as a table from `top` down, as many rows as have room above `most`. Gives where it ends and the rows that are left.
 *
 * No number and no unit is ever cut: what is wider than its column gets a second line, or lines of its own over the whole width.
 * `leastRows` are drawn even without room, so that whoever goes on with the rest comes to an end.
 *
 * @example drawTested(pen, tested, columns, { top: 39, most: 90 }) // { bottom: 61.3, left: [] }
 */
export function drawTested(
  pen: Pen,
  rows: readonly Row[],
  columns: TestedColumns,
  { top, most, mostRows = MOST_ROWS, leastRows = 0 }: { top: number; most: number; mostRows?: number; leastRows?: number },
): { bottom: number; left: Row[] } {
  const { left, right } = columns;
  const line = (y: number, thick = THIN): void => pen.line(left, y, right, y, thick);
  line(top);
  const heading = { baseline: top + 2.7, face: 'mono', points: SMALLEST_POINTS } as const;
  pen.text('tested', { x: left, ...heading });
  pen.text('reading', { x: columns.readingRight, ...heading, align: 'right' });
  pen.text('limit', { x: columns.limit, ...heading });
  pen.text('verdict', { x: right, ...heading, align: 'right' });
  let y = top + 3.9;
  let done = 0;
  for (const row of rows.slice(0, mostRows)) {
    const laid = layRow(row, columns);
    const height = cellsHeight(laid) + laid.below.length * LINES.each;
    const more = done + 1 < rows.length ? MORE_OVERLEAF : 0;
    if (done >= leastRows && y + height + more > most) break;
    line(y);
    drawRow(pen, laid, columns, y);
    y += height;
    done += 1;
  }
  if (done < rows.length)
    pen.text(`${rows.length - done} more overleaf`, { x: left, baseline: y + 3, face: 'read', points: SMALLEST_POINTS });
  const bottom = done < rows.length ? y + MORE_OVERLEAF : y;
  line(bottom, THICK);
  return { bottom, left: rows.slice(done) };
}

function layRow(row: Row, columns: TestedColumns): Laid {
  const title = titleLines(row.title, columns.titleWidth);
  const reading = row.lamps ? [] : inLines([withSpread(row), ...figures(row)], 'mono', columns.readingWidth);
  const limit = inLines([limitOnPaper(row)], 'read', columns.limitWidth) ?? wordLines(limitOnPaper(row), columns.limitWidth);
  if (reading && limit) return { row, title, reading, limit, below: [] };
  const below = linesOf([...(row.lamps ? [] : [withSpread(row)]), row.limit], columns.right - columns.left);
  return { row, title, reading: [], limit: [], below };
}

/** A text whole, or its parts a line each; undefined where even they are wider than that. */
function inLines([whole = '', ...parts]: readonly string[], face: Face, width: number): string[] | undefined {
  const fits = (text: string): boolean => widthMm(text, face, SMALLEST_POINTS) <= width;
  if (fits(whole)) return [whole];
  return parts.length > 1 && parts.every(fits) ? parts : undefined;
}

/** Broken between words, two lines at most; a unit stays with its number. Undefined where that has no room. */
function wordLines(text: string, width: number): string[] | undefined {
  const words = text.replace(/(\d) (?=\S+$)/, '$1\u00a0').split(' ');
  const lines: string[] = [];
  for (const word of words) {
    const longer = [...lines.slice(-1), word].join(' ');
    if (lines.length > 0 && widthMm(longer, 'read', SMALLEST_POINTS) <= width) lines[lines.length - 1] = longer;
    else lines.push(word);
  }
  return lines.length <= 2 && lines.every((line) => widthMm(line, 'read', SMALLEST_POINTS) <= width) ? lines : undefined;
}

/** Pieces one after the other, each on a line of its own where it has no room; only one wider than the paper is broken. */
function linesOf(pieces: readonly string[], width: number): string[] {
  const lines: string[] = [];
  for (const piece of pieces) {
    const longer = [...lines.slice(-1), piece].join(', ');
    if (lines.length > 0 && widthMm(longer, 'mono', SMALLEST_POINTS) <= width) lines[lines.length - 1] = longer;
    else if (widthMm(piece, 'mono', SMALLEST_POINTS) <= width) lines.push(piece);
    else {
      const laid = layLines([{ text: piece, face: 'mono' }], { points: SMALLEST_POINTS, width, lineHeight: LINES.each });
      lines.push(...laid.lines.map((runs) => runs.map(({ text }) => text).join('')));
    }
  }
  return lines;
}

/** A title that is too long for its column stands on lines of the smallest type; what is still too long is cut between words. */
function titleLines(title: string, width: number): string[] {
  if (widthMm(title, 'read', TITLE_POINTS) <= width) return [title];
  const fits = (text: string): boolean => widthMm(text, 'read', SMALLEST_POINTS) <= width;
  const lines: string[] = [];
  for (const word of title.split(' ').filter(Boolean)) {
    const longer = [...lines.slice(-1), word].join(' ');
    if (lines.length > 0 && fits(longer)) lines[lines.length - 1] = longer;
    else lines.push(word);
  }
  const kept = lines.slice(0, MOST_TITLE_LINES);
  if (lines.length > MOST_TITLE_LINES) {
    const words = (kept.pop() ?? '').split(' ');
    // Nor does a number end it that may have had a unit.
    while (words.length > 1 && (!fits(`${words.join(' ')} …`) || /\d\W*$/u.test(words.at(-1) ?? ''))) words.pop();
    kept.push(`${words.join(' ')} …`);
  }
  return kept.map((line) => cutToWidth(line, 'read', SMALLEST_POINTS, width));
}

function cellsHeight({ title, reading, limit }: Laid): number {
  const lines = Math.max(title.length, reading.length, limit.length);
  return lines <= 1 ? ROW_MM : LINES.around + lines * LINES.each;
}

function drawRow(pen: Pen, laid: Laid, columns: TestedColumns, y: number): void {
  const { row, title, reading, limit, below } = laid;
  const height = cellsHeight(laid);
  const baseline = y + height / 2 + 1;
  const cell = (lines: readonly string[], place: { x: number; face: Face; points: number; width: number; align?: 'right' }): void => {
    if (lines.length === 1) pen.fit(lines[0] ?? '', { ...place, baseline });
    else {
      const first = y + LINES.first + (height - LINES.around - lines.length * LINES.each) / 2;
      lines.forEach((line, index) => pen.fit(line, { ...place, points: SMALLEST_POINTS, baseline: first + index * LINES.each }));
    }
  };
  cell(title, { x: columns.left, face: 'read', points: TITLE_POINTS, width: columns.titleWidth });
  if (row.lamps) lampRow(pen, row.lamps, columns, baseline);
  cell(reading, { x: columns.readingRight, face: 'mono', points: 8, width: columns.readingWidth, align: 'right' });
  cell(limit, { x: columns.limit, face: 'read', points: 7.8, width: columns.limitWidth });
  below.forEach((line, index) =>
    pen.text(line, {
      x: columns.left,
      baseline: y + height - LINES.around + (index + 0.8) * LINES.each,
      face: 'mono',
      points: SMALLEST_POINTS,
    }),
  );
  pen.shape(PASS_MARK, { x: columns.mark, y: baseline - 2.5, scale: MARK_MM / 20 });
  pen.text(row.verdict, { x: columns.right, baseline, face: 'bold', points: 8.5, align: 'right' });
}

/** A number, a blank, its unit; neither part where it is no such reading (`looked at`, `3:05`). */
const numberAndUnit = (reading: string): { number?: string | undefined; unit?: string | undefined } => {
  const [, number, unit] = /^(\S*\d) (\S.*)$/.exec(reading) ?? [];
  return { number, unit };
};

/** `0.084 ±0.007 Ω`: the unit goes behind the spread. */
function withSpread({ reading, spread }: Row): string {
  const { number, unit } = numberAndUnit(reading);
  if (spread === undefined) return reading;
  return number === undefined ? `${reading} ${spread}` : `${number} ${spread} ${unit ?? ''}`;
}

/** On two lines each has the unit. */
function figures({ reading, spread }: Row): string[] {
  if (spread === undefined) return [reading];
  const { unit } = numberAndUnit(reading);
  return [reading, unit === undefined ? spread : `${spread} ${unit}`];
}

/** The reading has its unit already: on paper the limit goes without, so that it stays readable. A row of lamps has no reading. */
function limitOnPaper({ reading, limit, lamps }: Row): string {
  const { unit } = numberAndUnit(reading);
  return !lamps && unit !== undefined && limit.endsWith(` ${unit}`) ? limit.slice(0, -unit.length - 1) : limit;
}

/** The ready blink's lamps in panel order: lit is a black disc, dark a ring. */
function lampRow(pen: Pen, lamps: readonly boolean[], { readingRight, readingWidth }: TestedColumns, baseline: number): void {
  const pitch = Math.min(3.2, readingWidth / lamps.length);
  const radius = Math.min(1.1, pitch * 0.35);
  for (const [index, lit] of lamps.entries()) {
    const x = readingRight - radius - 0.2 - (lamps.length - 1 - index) * pitch;
    pen.circle(x, baseline - 1, radius, { thick: 0.4, ...(lit ? { filled: true } : {}) });
  }
}
