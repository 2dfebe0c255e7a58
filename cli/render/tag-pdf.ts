import type { TagPage } from '../../shared/api/tags.js';
import { drawQr } from './tag-qr.js';
import { mm, SMALLEST_POINTS, TagPen, type Run } from './tag-pen.js';
import { dayText } from './words.js';

// The look's print rules (tokens, "Print: the readiness tag"): black on white, lines of two dots at least, type 7 pt at least.
const PAGE = { width: 105, height: 148 };
const EDGE = 2.5;
const CORNER = 12.5;
const LEFT = 6.5;
const RIGHT = PAGE.width - LEFT;
const THICK = 0.7;
const THIN = 0.25;
const HOLE = { x: PAGE.width / 2, y: 10.5, r: 3 };
/** From here down: caution, shop, "certifies no compliance". */
const FOOT_BASELINE = 142.4;
const FOOT_LINE = 3.3;
/** The lower half (mended, signed off, QR) needs so much above the caution. */
const LOWER_HALF = 35.5;
const MOST_ROWS = 10;
const ROW = { plain: 4.6, twoLines: 6 };
const CAPTION_POINTS = 7.5;

const COLUMNS = {
  title: LEFT,
  titleWidth: 33.5,
  readingRight: 66.5,
  readingWidth: 26,
  limit: 68.5,
  limitWidth: 18.5,
  mark: 88,
  word: RIGHT,
};
const MARK_MM = 3.1;
const PASS_MARK = 'M1 1H19V1.4L8.6 11.6 5.4 8.4 3.2 10.6 8.6 16 19 5.8V19H1z';
const CAUTION_MARK = 'M12 0 24 22H0z M10.6 7.5h2.8v7.2h-2.8z M10.6 16.4h2.8v2.8h-2.8z';

type Row = TagPage['content']['tested'][number];

/** The readiness tag as a PDF of A6 pages: what doesn't fit on the first goes on overleaf. */
export function tagPdf(page: TagPage): Promise<Buffer> {
  const { content } = page;
  const pen = new TagPen(PAGE, { title: `Readiness tag ${content.tag}`, madeAt: new Date(content.signedOffAt) });
  pen.doc.addPage();
  outline(pen);
  head(pen, page);
  const footTop = foot(pen, page);
  const tableTop = plate(pen, page);
  const rest = tested(pen, content.tested, tableTop, footTop - LOWER_HALF);
  lowerHalf(pen, page, rest.bottom, footTop);
  if (content.sample) sampleAcross(pen, tableTop, rest.bottom);
  for (let left = rest.left; left.length > 0;) left = overleaf(pen, page, left);
  return pen.finish();
}

function outline(pen: TagPen): void {
  const { width, height } = PAGE;
  pen.shape(
    `M${EDGE + CORNER} ${EDGE}H${width - EDGE - CORNER}L${width - EDGE} ${EDGE + CORNER}V${height - EDGE}H${EDGE}V${EDGE + CORNER}z`,
    { stroke: THICK },
  );
  const { x, y, r } = HOLE;
  pen.doc
    .circle(mm(x), mm(y), mm(r))
    .lineWidth(mm(0.4))
    .dash(mm(1.2), { space: mm(0.8) })
    .stroke('black')
    .undash();
  for (const [x1, y1, x2, y2] of [
    [-5, 0, -2.6, 0],
    [2.6, 0, 5, 0],
    [0, -5, 0, -2.6],
    [0, 2.6, 0, 5],
  ] as const)
    pen.line(x + x1, y + y1, x + x2, y + y2, 0.3);
}

function head(pen: TagPen, { content }: TagPage): void {
  pen.text('Ready', LEFT - 0.4, 25.2, 'heavy', 35);
  const width = pen.text(content.tag, RIGHT, 25.2, 'monoBold', 20, 'right');
  pen.text('tag', RIGHT - width - 2, 25.2, 'mono', 8, 'right');
  pen.line(LEFT, 27.2, RIGHT, 27.2, THICK);
}

/** What is on the machine's own plate. Gives where the table begins. */
function plate(pen: TagPen, { content }: TagPage): number {
  const { maker, model, serial, volts, hertz, watts, massKg } = content.plate;
  const rated = [
    volts === undefined ? '' : `${volts} V`,
    hertz === undefined ? '' : `${hertz} Hz`,
    watts === undefined ? '' : `${watts} W`,
    massKg === undefined ? '' : `${massKg} kg`,
  ].filter(Boolean);
  const runs: Run[] = [
    { text: `${maker} ${model} `, face: 'bold' },
    { text: `${content.appliance}, ${serial === undefined ? 'serial unreadable' : 'serial '}`, face: 'read' },
    ...(serial === undefined ? [] : [{ text: `${serial}${rated.length > 0 ? ', ' : ''}`, face: 'mono' } as const]),
    ...(rated.length === 0 ? [] : [{ text: `${serial === undefined ? ', ' : ''}${rated.join(' ')}`, face: 'mono' } as const]),
    ...(content.sample ? [{ text: '  SAMPLE, simulated', face: 'bold' } as const] : []),
  ];
  return pen.paragraph(runs, LEFT, 31.8, 9, RIGHT - LEFT, 4) - 2.6;
}

/** The tested list from `top` down, as many rows as there is room for. */
function tested(pen: TagPen, rows: readonly Row[], top: number, most: number): { bottom: number; left: readonly Row[] } {
  const line = (y: number, width = THIN): void => pen.line(LEFT, y, RIGHT, y, width);
  line(top);
  const heading = top + 2.7;
  pen.text('tested', COLUMNS.title, heading, 'mono', SMALLEST_POINTS);
  pen.text('reading', COLUMNS.readingRight, heading, 'mono', SMALLEST_POINTS, 'right');
  pen.text('limit', COLUMNS.limit, heading, 'mono', SMALLEST_POINTS);
  pen.text('verdict', COLUMNS.word, heading, 'mono', SMALLEST_POINTS, 'right');
  let y = top + 3.9;
  let done = 0;
  for (const row of rows.slice(0, MOST_ROWS)) {
    const lines = titleLines(pen, row.title);
    const height = lines.length === 1 ? ROW.plain : ROW.twoLines;
    if (y + height > most) break;
    line(y);
    drawRow(pen, row, lines, y, height);
    y += height;
    done += 1;
  }
  if (done < rows.length) pen.text(`${rows.length - done} more overleaf`, LEFT, y + 3, 'read', SMALLEST_POINTS);
  const bottom = done < rows.length ? y + 4 : y;
  line(bottom, THICK);
  return { bottom, left: rows.slice(done) };
}

/** A title that is too long for its column stands on two lines of the smallest type. */
function titleLines(pen: TagPen, title: string): string[] {
  if (pen.widthOf(title, 'read', 8.5) <= COLUMNS.titleWidth) return [title];
  const words = title.split(' ');
  let first = words.shift() ?? '';
  while (words[0] !== undefined && pen.widthOf(`${first} ${words[0]}`, 'read', SMALLEST_POINTS) <= COLUMNS.titleWidth)
    first += ` ${words.shift() ?? ''}`;
  return [first, words.join(' ')].filter(Boolean);
}

function drawRow(pen: TagPen, row: Row, title: readonly string[], y: number, height: number): void {
  const baseline = y + height / 2 + 1;
  if (title.length === 1) pen.fit(title[0] ?? '', COLUMNS.title, baseline, 'read', 8.5, COLUMNS.titleWidth);
  else title.forEach((line, index) => pen.fit(line, COLUMNS.title, y + 2.5 + index * 2.7, 'read', SMALLEST_POINTS, COLUMNS.titleWidth));
  if (row.lamps) lampRow(pen, row.lamps, baseline);
  else pen.fit(withSpread(row), COLUMNS.readingRight, baseline, 'mono', 8, COLUMNS.readingWidth, 'right');
  pen.fit(row.limit, COLUMNS.limit, baseline, 'read', 7.8, COLUMNS.limitWidth);
  pen.shape(PASS_MARK, { x: COLUMNS.mark, y: baseline - 2.5, scale: MARK_MM / 20, fill: true });
  pen.text(row.verdict, COLUMNS.word, baseline, 'bold', 8.5, 'right');
}

/** `0.084 ±0.007 Ω`: the unit goes behind the spread. */
function withSpread({ reading, spread }: Row): string {
  const [, number, unit] = /^(.*\d) (\D+)$/.exec(reading) ?? [];
  if (spread === undefined) return reading;
  return number === undefined ? `${reading} ${spread}` : `${number} ${spread} ${unit ?? ''}`;
}

/** The ready blink's lamps in panel order: lit is a black disc, dark a ring. */
function lampRow(pen: TagPen, lamps: readonly boolean[], baseline: number): void {
  const pitch = Math.min(3.2, COLUMNS.readingWidth / lamps.length);
  const r = Math.min(1.1, pitch * 0.35);
  lamps.forEach((lit, index) => {
    const x = COLUMNS.readingRight - r - (lamps.length - 1 - index) * pitch;
    pen.doc.circle(mm(x), mm(baseline - 1), mm(r)).lineWidth(mm(0.4));
    if (lit) pen.doc.fillAndStroke('black', 'black');
    else pen.doc.stroke('black');
  });
}

function lowerHalf(pen: TagPen, page: TagPage, top: number, bottom: number): void {
  const { content, url } = page;
  const qr = drawQr(pen, url, { right: RIGHT, top: top + THICK / 2 });
  // Below the quiet zone, both lines end at the text edge.
  pen.text('Scan: does it still stand?', RIGHT, qr.bottom + 2, 'read', CAPTION_POINTS, 'right');
  const word = pen.text(`${content.tag} ${content.lookUpWord}`, RIGHT, qr.bottom + 5, 'monoBold', CAPTION_POINTS, 'right');
  const caption = word + pen.text('Or look up ', RIGHT - word, qr.bottom + 5, 'read', CAPTION_POINTS, 'right');

  const room = Math.min(qr.left, RIGHT - caption - 1) - LEFT;
  const say = (y: number, label: string, text: string): number =>
    pen.paragraph(
      [
        { text: `${label} `, face: 'bold' },
        { text, face: 'read' },
      ],
      LEFT,
      y,
      8.5,
      room,
      3.8,
    ) + 0.6;
  let y = top + 4.6;
  const [first, ...others] = content.mended;
  y = first
    ? say(y, 'Mended:', `${mendedText(first)}${others.length === 0 ? '.' : `, and ${others.length} more, on the tag's page.`}`)
    : say(y, 'Mended:', 'nothing had to be.');
  y = say(
    y,
    'Signed off',
    `${dayText(content.signedOffAt)} by ${content.signedOffBy}, lead${content.fourEyes ? '' : ', who worked on it too'}.`,
  );
  y = say(y, 'Warranty', `${content.warrantyMonths} months from the day of sale.`);
  for (const [index, label] of ['sold on', 'until'].entries()) {
    const at = Math.min(bottom - 2 - (1 - index) * 6, y + 3 + index * 6);
    pen.text(label, LEFT, at, 'mono', 8);
    pen.line(LEFT + 16.5, at + 0.4, LEFT + room - 2, at + 0.4, 0.3);
  }
}

function mendedText({ part, source, at, by }: TagPage['content']['mended'][number]): string {
  const what = part.charAt(0).toLowerCase() + part.slice(1);
  return source === 'none' ? `${what} ${dayText(at)}, by ${by}` : `${what} replaced ${dayText(at)}, a ${source} part, by ${by}`;
}

/** Caution and shop, from the bottom edge up; they keep their place. Gives the top of the caution's frame. */
function foot(pen: TagPen, { content }: TagPage): number {
  const { name, address, phone } = content.shop;
  pen.text('Says what this shop tested. Certifies no compliance.', LEFT, FOOT_BASELINE, 'read', 7.5);
  pen.paragraph(
    [
      { text: name, face: 'bold' },
      { text: `, ${address}, `, face: 'read' },
      { text: phone, face: 'mono' },
    ],
    LEFT,
    FOOT_BASELINE - FOOT_LINE,
    7.5,
    RIGHT - LEFT,
    FOOT_LINE,
  );

  const word = { width: 20.5, height: 5.6 };
  const text = { x: LEFT + 1.6 + word.width + 2, width: RIGHT - LEFT - word.width - 5.6, line: 3.4 };
  const cautions: Run[] = [{ text: content.cautions.join(' '), face: 'read' }];
  const lines = linesOf(pen, content.cautions.join(' '), 8, text.width);
  const height = Math.max(word.height + 2.4, lines * text.line + 2.6);
  const top = FOOT_BASELINE - FOOT_LINE - 4 - height;
  pen.doc
    .rect(mm(LEFT + THICK / 2), mm(top + THICK / 2), mm(RIGHT - LEFT - THICK), mm(height - THICK))
    .lineWidth(mm(THICK))
    .stroke('black');
  const wordTop = top + (height - word.height) / 2;
  pen.doc.rect(mm(LEFT + 1.6), mm(wordTop), mm(word.width), mm(word.height)).fill('black');
  pen.doc
    .save()
    .translate(mm(LEFT + 3), mm(wordTop + 1.1))
    .scale(mm(3.4 / 22))
    .path(CAUTION_MARK)
    .fill('white', 'even-odd')
    .restore();
  pen.reversed('Caution', LEFT + 7.6, wordTop + 3.8, 'monoBold', 8);
  pen.paragraph(cautions, text.x, top + (height - lines * text.line) / 2 + 2.6, 8, text.width, text.line);
  return top;
}

function linesOf(pen: TagPen, text: string, points: number, width: number): number {
  let lines = 1;
  let at = 0;
  for (const word of text.split(/(?<= )/)) {
    if (at > 0 && at + pen.widthOf(word.trimEnd(), 'read', points) > width) {
      lines += 1;
      at = 0;
    }
    at += pen.widthOf(word, 'read', points);
  }
  return lines;
}

/** Across the results of a demo shop, in outline: a large black area would smear, and nothing under it may become unreadable. */
function sampleAcross(pen: TagPen, top: number, bottom: number): void {
  const { doc } = pen;
  const middle = { x: PAGE.width / 2, y: (top + bottom) / 2 };
  doc.save().rotate(-24, { origin: [mm(middle.x), mm(middle.y)] });
  doc.font('heavy').fontSize(62).lineWidth(mm(THIN)).strokeColor('black');
  const width = doc.widthOfString('SAMPLE');
  doc.text('SAMPLE', mm(middle.x) - width / 2, mm(middle.y + 7.5), { lineBreak: false, baseline: 'alphabetic', stroke: true, fill: false });
  doc.restore();
}

/** The rows that did not fit, on a page of their own. */
function overleaf(pen: TagPen, page: TagPage, rows: readonly Row[]): readonly Row[] {
  pen.doc.addPage();
  outline(pen);
  pen.text(`Tag ${page.content.tag}, overleaf`, LEFT, 25.2, 'bold', 14);
  const { left, bottom } = tested(pen, rows, 29, PAGE.height - 12);
  if (page.content.sample) sampleAcross(pen, 29, Math.max(bottom, 70));
  return left;
}
