import { BARS_QUIET_MODULES, barsWidth, DOT_MM, drawBars, drawQr, QR_QUIET_MODULES, qrSide, type Bars, type QrModules } from './codes.js';
import type { Paper } from './pages.js';
import { Pen, SMALLEST_POINTS } from './pen.js';
import type { LabelSize } from './sizes.js';
import { POINTS_PER_MM, widthMm, type Face } from './type.js';

/** What a stock label says: printed at intake, for whoever looks for the machine or brings it to the bench. */
export interface StockLabel {
  kind: 'stock';
  /** The unit's number, like `0412`. */
  number: string;
  maker: string;
  model: string;
  appliance: string;
  serial?: string | undefined;
  /** The day it was taken in, in words. */
  takenIn: string;
  licensedOnly: boolean;
  /** The address of the unit's page. */
  qr: QrModules;
  /** The unit's number as Code 128: drawn instead of the QR code where that is asked for, or the QR code has no room. */
  bars: Bars;
  code: 'qr' | 'bars';
}

/** What a price label says. A machine without a standing tag is sold for parts only. */
export interface PriceLabel {
  kind: 'price';
  number: string;
  maker: string;
  model: string;
  appliance: string;
  /** In words, with its currency. */
  price: string;
  grade?: string | undefined;
  /** The number of the tag that stands. */
  tag?: string | undefined;
  shop: { name: string; phone: string };
}

/** Label printers leave so much white all round (common practice, no published source). */
const MARGIN_MM = 2;
const GAP_MM = 1.5;
const THICK = 0.5;
/** The label that type sizes are made for; larger ones have larger type, smaller ones smaller. */
const USUAL = { width: 62, height: 29 };
const SCALE = { least: 0.8, most: 2.5 };
/** Whole dots a module: 0.375 mm at least for a QR code, 0.25 mm for bars (common practice at 203 dots an inch, no published source). */
const QR_DOTS = { least: 3, most: 10 };
const BAR_DOTS = { least: 2, most: 4 };
/** A QR code takes at most so much of a label's width: the number is what is read at arm's length. */
const QR_SHARE = 0.5;
/** From baseline to baseline, as a part of the type size; and from the baseline up to a figure's top. */
const LINE = 1.22;
const FIGURE_HEIGHT = 0.73;
const BAR_HEIGHT = { least: 6, share: 0.32 };
const LARGEST_POINTS = 110;

interface Line {
  text: string;
  face: Face;
  points: number;
}

/**
 * A label on paper of its exact size. Text without room is set smaller, down to 7 points, then cut with an ellipsis; lines that have no
 * room below one another are left out from the last one up.
 *
 * Assumes a size that `readLabelSize` gives.
 *
 * @example labelPaper(stockLabel, { width: 62, height: 29 }).pages.length // 1
 */
export function labelPaper(label: StockLabel | PriceLabel, size: LabelSize): Paper {
  const pen = new Pen();
  if (label.kind === 'stock') drawStock(pen, label, size);
  else drawPrice(pen, label, size);
  const title = `${label.kind === 'stock' ? 'Stock' : 'Price'} label ${label.number}`;
  return { title, pages: [{ widthMm: size.width, heightMm: size.height, marks: pen.marks }] };
}

const scaleOf = ({ width, height }: LabelSize): number =>
  Math.min(SCALE.most, Math.max(SCALE.least, Math.min(width / USUAL.width, height / USUAL.height)));
const mmOf = (points: number): number => points / POINTS_PER_MM;

/** The largest whole number of dots with which a code has room; undefined where it has none. */
function mostDots(room: number, widthAt: (dots: number) => number, { least, most }: { least: number; most: number }): number | undefined {
  for (let dots = most; dots >= least; dots -= 1) if (widthAt(dots) <= room) return dots;
  return undefined;
}

function drawStock(pen: Pen, label: StockLabel, size: LabelSize): void {
  const scale = scaleOf(size);
  // What has no room goes from the last line up: who may work on it is the last to go.
  const lines: Line[] = [
    ...(label.licensedOnly ? [{ text: 'Licensed person only', face: 'bold', points: 8 * scale } as const] : []),
    { text: `${label.maker} ${label.model}`, face: 'bold', points: 9 * scale },
    { text: label.serial === undefined ? 'serial unreadable' : label.serial, face: 'mono', points: 8 * scale },
    { text: `in ${label.takenIn}, ${label.appliance}`, face: 'read', points: 7.5 * scale },
  ];
  // The quiet zone of a QR code is white: it may lie in the margin.
  const room = Math.min(size.height - 1, size.width * QR_SHARE);
  const dots = label.code === 'qr' ? mostDots(room, (count) => qrSide(label.qr, count), QR_DOTS) : undefined;
  if (dots === undefined) {
    const height = Math.max(BAR_HEIGHT.least, size.height * BAR_HEIGHT.share);
    const top = size.height - MARGIN_MM - height;
    drawTextColumn(pen, label.number, lines, { x: MARGIN_MM, top: MARGIN_MM, right: size.width - MARGIN_MM, bottom: top - GAP_MM });
    const wide = mostDots(size.width, (count) => barsWidth(label.bars, count), BAR_DOTS) ?? BAR_DOTS.least;
    const x = Math.max(0, MARGIN_MM - BARS_QUIET_MODULES * wide * DOT_MM);
    drawBars(pen, label.bars, { x, y: top, height, dots: wide });
    return;
  }
  const side = qrSide(label.qr, dots);
  const quiet = QR_QUIET_MODULES * dots * DOT_MM;
  const x = Math.max(0, MARGIN_MM - quiet);
  drawQr(pen, label.qr, { x, y: (size.height - side) / 2, dots });
  const place = { x: x + side, top: MARGIN_MM, right: size.width - MARGIN_MM, bottom: size.height - MARGIN_MM };
  drawTextColumn(pen, label.number, lines, place);
}

function drawPrice(pen: Pen, label: PriceLabel, size: LabelSize): void {
  const scale = scaleOf(size);
  const left = MARGIN_MM;
  const right = size.width - MARGIN_MM;
  const place = { x: left, top: MARGIN_MM, right, bottom: size.height - MARGIN_MM };
  const lines: Line[] = [
    { text: `${label.maker} ${label.model}, ${label.appliance}`, face: 'bold', points: 9 * scale },
    {
      text: label.tag === undefined ? `For parts only, no tag. No. ${label.number}` : `No. ${label.number}, readiness tag ${label.tag}`,
      face: label.tag === undefined ? 'bold' : 'read',
      points: 8 * scale,
    },
    { text: `${label.shop.name}, ${label.shop.phone}`, face: 'read', points: 7.5 * scale },
  ];
  const grade = label.grade === undefined ? undefined : { text: `grade ${label.grade}`, points: 11 * scale };
  drawTextColumn(pen, label.price, lines, place, grade);
}

/** The large word above, as large as it has room; the lines below it, the last one at the bottom. */
function drawTextColumn(
  pen: Pen,
  large: string,
  lines: readonly Line[],
  { x, top, right, bottom }: { x: number; top: number; right: number; bottom: number },
  beside?: { text: string; points: number },
): void {
  const width = right - x;
  const kept = linesWithRoom(lines, (bottom - top) * 0.68);
  const linesHeight = kept.reduce((sum, { points }) => sum + mmOf(points) * LINE, 0);
  const room = { width, height: bottom - top - linesHeight - GAP_MM / 2 };
  const frame = beside === undefined ? undefined : drawBeside(pen, beside, { right, top, width: width * 0.4 });
  // Left of the frame, or below it: wherever the word becomes larger.
  const rooms = frame
    ? [
        { width: width - frame.width - GAP_MM, height: room.height },
        { width, height: room.height - frame.height - GAP_MM },
      ]
    : [room];
  const [largest = { points: SMALLEST_POINTS, width }] = rooms
    .map((one) => ({ points: pointsIn(large, one), width: one.width }))
    .sort((a, b) => b.points - a.points);
  pen.fit(large, { x, baseline: top + room.height, face: 'monoBold', ...largest });
  let y = bottom - linesHeight;
  for (const { text, face, points } of kept) {
    y += mmOf(points) * LINE;
    pen.fit(text, { x, baseline: y - mmOf(points) * 0.25, face, points, width });
  }
}

/** The type size at which a word fills a room. */
function pointsIn(text: string, { width, height }: { width: number; height: number }): number {
  const byHeight = (height * POINTS_PER_MM) / FIGURE_HEIGHT;
  const byWidth = width / widthMm(text, 'monoBold', 1);
  return Math.max(SMALLEST_POINTS, Math.min(LARGEST_POINTS, byHeight, byWidth));
}

/** As many lines as have room in a height: smaller first, down to the smallest type, then without the last. */
function linesWithRoom(lines: readonly Line[], height: number): Line[] {
  const heightOf = (some: readonly Line[]): number => some.reduce((sum, { points }) => sum + mmOf(points) * LINE, 0);
  let kept = lines.map((line) => ({ ...line, points: Math.max(SMALLEST_POINTS, line.points) }));
  while (heightOf(kept) > height && kept.some(({ points }) => points > SMALLEST_POINTS))
    kept = kept.map((line) => ({ ...line, points: Math.max(SMALLEST_POINTS, line.points - 0.25) }));
  while (kept.length > 1 && heightOf(kept) > height) kept = kept.slice(0, -1);
  return kept;
}

/** The grade in a frame at the upper right. Gives the frame's size. */
function drawBeside(
  pen: Pen,
  { text, points }: { text: string; points: number },
  { right, top, width }: { right: number; top: number; width: number },
): { width: number; height: number } {
  const inset = THICK + 1;
  const size = Math.max(SMALLEST_POINTS, points);
  const figure = mmOf(size) * FIGURE_HEIGHT;
  const place = { x: right - inset, baseline: top + inset + figure, face: 'bold', points: size, align: 'right' } as const;
  const frame = { width: pen.fit(text, { ...place, width: width - 2 * inset }) + 2 * inset, height: figure + 2 * inset };
  pen.frame({ x: right - frame.width, y: top, ...frame }, THICK);
  return frame;
}
