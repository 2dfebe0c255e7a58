import type { TagContent } from '../api/tags.js';
import { cutToWidth, SMALLEST_POINTS, type Pen } from './pen.js';
import { widthMm } from './type.js';

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
const ROW = { plain: 4.6, twoLines: 6 };
/** The line that says how many rows are overleaf. */
const MORE_OVERLEAF = 4;
const TITLE_POINTS = 8.5;
const MARK_MM = 3.1;
const PASS_MARK = 'M1 1H19V1.4L8.6 11.6 5.4 8.4 3.2 10.6 8.6 16 19 5.8V19H1z';

type Row = TagContent['tested'][number];

/**
 * What was tested as a table from `top` down, as many rows as have room above `most`. Gives where it ends and the rows that are left; at
 * least one row is drawn, so that whoever goes on with the rest comes to an end.
 *
 * @example drawTested(pen, tested, columns, { top: 39, most: 90 }) // { bottom: 61.3, left: [] }
 */
export function drawTested(
  pen: Pen,
  rows: readonly Row[],
  columns: TestedColumns,
  { top, most, mostRows = MOST_ROWS }: { top: number; most: number; mostRows?: number },
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
    const title = titleLines(row.title, columns.titleWidth);
    const height = title.length === 1 ? ROW.plain : ROW.twoLines;
    const more = done + 1 < rows.length ? MORE_OVERLEAF : 0;
    if (done > 0 && y + height + more > most) break;
    line(y);
    drawRow(pen, row, title, columns, y, height);
    y += height;
    done += 1;
  }
  if (done < rows.length)
    pen.text(`${rows.length - done} more overleaf`, { x: left, baseline: y + 3, face: 'read', points: SMALLEST_POINTS });
  const bottom = done < rows.length ? y + MORE_OVERLEAF : y;
  line(bottom, THICK);
  return { bottom, left: rows.slice(done) };
}

/** A title that is too long for its column stands on two lines of the smallest type; what is still too long is cut. */
function titleLines(title: string, width: number): string[] {
  if (widthMm(title, 'read', TITLE_POINTS) <= width) return [title];
  const words = title.split(' ');
  let first = words.shift() ?? '';
  while (words[0] !== undefined && widthMm(`${first} ${words[0]}`, 'read', SMALLEST_POINTS) <= width) first += ` ${words.shift() ?? ''}`;
  return [first, words.join(' ')].filter(Boolean).map((line) => cutToWidth(line, 'read', SMALLEST_POINTS, width));
}

function drawRow(pen: Pen, row: Row, title: readonly string[], columns: TestedColumns, y: number, height: number): void {
  const baseline = y + height / 2 + 1;
  const [one, two] = title;
  const place = { x: columns.left, face: 'read', width: columns.titleWidth } as const;
  if (two === undefined) pen.fit(one ?? '', { ...place, baseline, points: TITLE_POINTS });
  else
    for (const [index, line] of [one ?? '', two].entries())
      pen.fit(line, { ...place, baseline: y + 2.5 + index * 2.7, points: SMALLEST_POINTS });
  const reading = { x: columns.readingRight, baseline, face: 'mono', points: 8, width: columns.readingWidth, align: 'right' } as const;
  if (row.lamps) lampRow(pen, row.lamps, columns, baseline);
  else pen.fit(withSpread(row), reading);
  pen.fit(limitOnPaper(row), { x: columns.limit, baseline, face: 'read', points: 7.8, width: columns.limitWidth });
  pen.shape(PASS_MARK, { x: columns.mark, y: baseline - 2.5, scale: MARK_MM / 20 });
  pen.text(row.verdict, { x: columns.right, baseline, face: 'bold', points: 8.5, align: 'right' });
}

/** `0.084 ±0.007 Ω`: the unit goes behind the spread. */
function withSpread({ reading, spread }: Row): string {
  const [, number, unit] = /^(.*\d) (\D+)$/.exec(reading) ?? [];
  if (spread === undefined) return reading;
  return number === undefined ? `${reading} ${spread}` : `${number} ${spread} ${unit ?? ''}`;
}

/** The reading has its unit already: on paper the limit goes without, so that it stays readable. */
function limitOnPaper({ reading, limit }: Row): string {
  const unit = reading.split(' ').at(-1) ?? '';
  return unit !== '' && limit.endsWith(` ${unit}`) ? limit.slice(0, -unit.length - 1) : limit;
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
