import type { TagContent, TagPage } from '../api/tags.js';
import { drawQr, qrDots, qrSide, type QrModules } from './codes.js';
import { movedMark, type Mark, type Paper, type PaperPage } from './pages.js';
import { layLines, Pen } from './pen.js';
import { TAG_SHEETS, type TagForm, type TagFormat } from './sizes.js';
import { drawTested, type TestedColumns } from './tag-tested.js';
import type { Run } from './type.js';

// The look's print rules (tokens, "Print: the readiness tag"): black on white, lines of two dots at least, type 7 pt at least.
const CORNER = 12.5;
const THICK = 0.7;
const THIN = 0.25;
const HOLE = { y: 10.5, radius: 3, thick: 0.4 };
/** Footer's last baseline above the outline. */
const FOOT_ABOVE_EDGE = 3.1;
const FOOT = { points: 7.5, line: 3.3, mostLines: 2 };
const CAUTION = { points: 8, line: 3.4, mostLines: 7, word: { width: 20.5, height: 5.6 } };
const CAUTION_MARK = 'M12 0 24 22H0z M10.6 7.5h2.8v7.2h-2.8z M10.6 16.4h2.8v2.8h-2.8z';
const CAPTION = { points: 7.5, line: 3, height: 6 };
/** Mended, signed off, warranty and two lines to fill in by pen need so much, however small the QR code. */
const LEAST_LOWER_HALF = 33;
/** Two lines to fill in by pen, from baseline to baseline, and how far the last one stays above the caution. */
const BY_PEN = { apart: 6, above: 2 };

/** A tag with what the drawing of it needs and cannot know: its QR code's modules, and how days are written. */
export interface TagToPrint {
  tag: TagPage;
  /** Of `tag.url`. */
  qr: QrModules;
}

/** A day by the clock on the wall, of an ISO time: `5 Mar 2026`. */
type DayText = (iso: string) => string;

/** The text's left and right edge, the silhouette's bottom, and where columns stand: all that follows from a form. */
interface Frame {
  form: TagForm;
  left: number;
  right: number;
  columns: TestedColumns;
}

function frameOf(form: TagForm): Frame {
  const left = form.edge + form.padding;
  const right = form.width - left;
  const limit = right - 30;
  const columns = {
    left,
    right,
    titleWidth: limit - 28.5 - left - 1,
    readingRight: limit - 2,
    readingWidth: 26,
    limit,
    limitWidth: 18.5,
    mark: right - 10.5,
  };
  return { form, left, right, columns };
}

/**
 * Readiness tags on paper: one a page (A6 card, 4 x 6 in label), or four a sheet (A4, letter) to be cut in quarters.
 *
 * What was tested and does not fit on a tag's front goes on overleaf: on a page, or a quarter of the sheet, of its own.
 * Assumes tags that stand. A text without room is set smaller, down to 7 points, then cut with an ellipsis; readings and limits get more
 * lines instead.
 *
 * @example tagPaper([{ tag, qr }], 'a6', dayText).pages.length // 1
 */
export function tagPaper(tags: readonly TagToPrint[], format: TagFormat, dayText: DayText): Paper {
  const { form, width, height, across, down } = TAG_SHEETS[format];
  const frame = frameOf(form);
  const single = tags.flatMap((tag) => pagesOfTag(tag, frame, dayText));
  const title = `Readiness ${tags.length === 1 ? 'tag' : 'tags'} ${tags.map(({ tag }) => tag.content.tag).join(', ')}`;
  if (across * down === 1) return { title, pages: single.map((marks) => ({ widthMm: width, heightMm: height, marks })) };
  const pages: PaperPage[] = [];
  for (let first = 0; first < single.length; first += across * down) {
    const placed = single
      .slice(first, first + across * down)
      .flatMap((marks, place) =>
        marks.map((mark) => movedMark(mark, (place % across) * form.width, Math.floor(place / across) * form.height)),
      );
    pages.push({ widthMm: width, heightMm: height, marks: [...placed, ...cutMarks(width, height, form.edge)] });
  }
  return { title, pages };
}

/** Where to cut a sheet in quarters: short lines between the tags, a cross in the middle, an end at each side. */
function cutMarks(width: number, height: number, edge: number): Mark[] {
  const pen = new Pen();
  const length = 5;
  const [x, y] = [width / 2, height / 2];
  for (const at of [edge, y - length / 2, height - edge - length]) pen.line(x, at, x, at + length, THIN);
  for (const at of [edge, x - length / 2, width - edge - length]) pen.line(at, y, at + length, y, THIN);
  return pen.marks;
}

function pagesOfTag(print: TagToPrint, frame: Frame, dayText: DayText): (readonly Mark[])[] {
  const { tag } = print;
  const { form } = frame;
  const pen = new Pen();
  outline(pen, form);
  head(pen, tag.content.tag, frame);
  const footTop = foot(pen, tag.content, frame);
  const tableTop = plate(pen, tag.content, frame);
  const lowerHalf = Math.max(LEAST_LOWER_HALF, qrSide(print.qr, qrDots(print.qr.length)) + CAPTION.height + THICK);
  const table = drawTested(pen, tag.content.tested, frame.columns, { top: tableTop, most: footTop - lowerHalf });
  drawLowerHalf(pen, print, frame, { top: table.bottom, bottom: footTop }, dayText);
  if (tag.content.sample) sampleAcross(pen, form, tableTop, table.bottom);
  const pages: (readonly Mark[])[] = [pen.marks];
  for (let left = table.left; left.length > 0;) {
    const back = overleaf(tag.content, left, frame);
    pages.push(back.marks);
    left = back.left;
  }
  return pages;
}

function outline(pen: Pen, { width, height, edge, hole }: TagForm): void {
  const right = width - edge;
  pen.shape(`M${edge + CORNER} ${edge}H${right - CORNER}L${right} ${edge + CORNER}V${height - edge}H${edge}V${edge + CORNER}z`, {
    thick: THICK,
  });
  const x = width / 2;
  const y = edge + HOLE.y - 2.5;
  pen.circle(x, y, HOLE.radius, { thick: HOLE.thick, ...(hole === 'punch' ? { dash: { on: 1.2, off: 0.8 } } : {}) });
  if (hole === 'ring') return;
  for (const [x1, y1, x2, y2] of [
    [-5, 0, -2.6, 0],
    [2.6, 0, 5, 0],
    [0, -5, 0, -2.6],
    [0, 2.6, 0, 5],
  ] as const)
    pen.line(x + x1, y + y1, x + x2, y + y2, 0.3);
}

function head(pen: Pen, number: string, { form, left, right }: Frame): void {
  const baseline = form.edge + 22.7;
  const word = pen.text('Ready', { x: left - 0.4, baseline, face: 'heavy', points: 35 });
  const room = right - left - word - 10;
  const width = pen.fit(number, { x: right, baseline, face: 'monoBold', points: 20, align: 'right', width: room });
  pen.text('tag', { x: right - width - 2, baseline, face: 'mono', points: 8, align: 'right' });
  pen.line(left, baseline + 2, right, baseline + 2, THICK);
}

/** What is on the machine's own plate. Gives where the table begins. */
function plate(pen: Pen, content: TagContent, { form, left, right }: Frame): number {
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
  const baseline = form.edge + 29.3;
  return pen.paragraph(runs, { x: left, baseline, points: 9, width: right - left, lineHeight: 4, mostLines: 3 }).below - 2.6;
}

function drawLowerHalf(
  pen: Pen,
  { tag, qr }: TagToPrint,
  { left, right }: Frame,
  { top, bottom }: { top: number; bottom: number },
  dayText: DayText,
): void {
  const { content } = tag;
  const dots = qrDots(qr.length);
  const side = qrSide(qr, dots);
  // Outside the text's right edge there is nothing but the outline, further away than the quiet zone is wide.
  const quiet = (side - (side * qr.length) / (qr.length + 8)) / 2;
  const code = { x: right + quiet - side, y: top + THICK / 2, dots };
  drawQr(pen, qr, code);
  const captionTop = code.y + side;
  const { points, line } = CAPTION;
  pen.text('Scan: does it still stand?', { x: right, baseline: captionTop + 2, face: 'read', points, align: 'right' });
  const word = pen.text(`${content.tag} ${content.lookUpWord}`, {
    ...{ x: right, baseline: captionTop + 2 + line, align: 'right' },
    ...{ face: 'monoBold', points },
  });
  const lookUp = { x: right - word, baseline: captionTop + 2 + line, face: 'read', points, align: 'right' } as const;
  const caption = word + pen.text('Or look up ', lookUp);

  const room = Math.min(code.x, right - caption - 1) - left;
  let y = top + 4.6;
  const say = (label: string, text: string, mostLines: number): void => {
    const runs: Run[] = [
      { text: `${label} `, face: 'bold' },
      { text, face: 'read' },
    ];
    y = pen.paragraph(runs, { x: left, baseline: y, points: 8.5, width: room, lineHeight: 3.8, mostLines }).below + 0.4;
  };
  const [first, ...others] = content.mended;
  say(
    'Mended:',
    first
      ? `${mendedText(first, dayText)}${others.length === 0 ? '.' : `, and ${others.length} more, on the tag's page.`}`
      : 'nothing had to be.',
    3,
  );
  const whoElse = content.fourEyes ? '' : ', who worked on it too';
  say('Signed off', `${dayText(content.signedOffAt)} by ${content.signedOffBy}, lead${whoElse}.`, 2);
  say('Warranty', `${content.warrantyMonths} months from the day of sale.`, 2);
  for (const [index, label] of ['sold on', 'until'].entries()) {
    const baseline = Math.min(bottom - BY_PEN.above - (1 - index) * BY_PEN.apart, y + 3 + index * BY_PEN.apart);
    pen.text(label, { x: left, baseline, face: 'mono', points: 8 });
    pen.line(left + 16.5, baseline + 0.4, left + room - 2, baseline + 0.4, 0.3);
  }
}

function mendedText({ part, source, at, by }: TagContent['mended'][number], dayText: DayText): string {
  const what = part.charAt(0).toLowerCase() + part.slice(1);
  return source === 'none' ? `${what} ${dayText(at)}, by ${by}` : `${what} replaced ${dayText(at)}, a ${source} part, by ${by}`;
}

/** Caution and shop, from the bottom edge up; they keep their place. Gives the top of the caution's frame. */
function foot(pen: Pen, content: TagContent, { form, left, right }: Frame): number {
  const last = form.height - form.edge - FOOT_ABOVE_EDGE;
  const width = right - left;
  pen.text('Says what this shop tested. Certifies no compliance.', { x: left, baseline: last, face: 'read', points: FOOT.points });
  const { name, address, phone } = content.shop;
  const shop: Run[] = [
    { text: name, face: 'bold' },
    { text: `, ${address}, `, face: 'read' },
    { text: phone, face: 'mono' },
  ];
  const place = { points: FOOT.points, width, lineHeight: FOOT.line, mostLines: FOOT.mostLines };
  const shopTop = last - FOOT.line * layLines(shop, place).lines.length;
  pen.paragraph(shop, { x: left, baseline: shopTop, ...place });
  return caution(pen, content.cautions.join(' '), { left, right, bottom: shopTop - 4 });
}

/** A frame with the word in reverse; only the word, for large black areas smear. Gives the frame's top. */
function caution(pen: Pen, text: string, { left, right, bottom }: { left: number; right: number; bottom: number }): number {
  const { word, points, mostLines } = CAUTION;
  const x = left + 1.6 + word.width + 2;
  const place = { points, width: right - 1.6 - x, lineHeight: CAUTION.line, mostLines };
  const runs: Run[] = [{ text, face: 'read' }];
  const laid = layLines(runs, place);
  const textHeight = laid.lines.length * laid.lineHeight;
  const height = Math.max(word.height + 2.4, textHeight + 2.6);
  const top = bottom - height;
  pen.frame({ x: left, y: top, width: right - left, height }, THICK);
  const wordTop = top + (height - word.height) / 2;
  pen.fill({ x: left + 1.6, y: wordTop, width: word.width, height: word.height });
  pen.shape(CAUTION_MARK, { x: left + 3, y: wordTop + 1.1, scale: 3.4 / 22, white: true });
  pen.text('Caution', { x: left + 7.6, baseline: wordTop + 3.8, face: 'monoBold', points: 8, white: true });
  pen.paragraph(runs, { ...place, x, baseline: top + (height - textHeight) / 2 + 2.6 });
  return top;
}

/** Across the results of a demo shop, in outline: a large black area would smear, and nothing under it may become unreadable. */
function sampleAcross(pen: Pen, form: TagForm, top: number, bottom: number): void {
  pen.across('SAMPLE', { x: form.width / 2, y: (top + bottom) / 2, face: 'heavy', points: 62, degrees: -24, thick: THIN });
}

/** The rows that did not fit, on a page of their own. */
function overleaf(content: TagContent, rows: TagContent['tested'], frame: Frame): { marks: readonly Mark[]; left: TagContent['tested'] } {
  const { form, left, right, columns } = frame;
  const pen = new Pen();
  outline(pen, form);
  const baseline = form.edge + 22.7;
  pen.fit(`Tag ${content.tag}, overleaf`, { x: left, baseline, face: 'bold', points: 14, width: right - left });
  const table = drawTested(pen, rows, columns, {
    top: form.edge + 26.5,
    most: form.height - form.edge - 6,
    mostRows: Infinity,
    leastRows: 1,
  });
  if (content.sample) sampleAcross(pen, form, form.edge + 26.5, Math.max(table.bottom, 70));
  return { marks: pen.marks, left: table.left };
}
