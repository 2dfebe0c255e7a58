import type { Pen } from './pen.js';

/** A QR code's modules, row by row: true is dark. */
export type QrModules = readonly (readonly boolean[])[];
/** A bar code's bars: where each begins and how wide it is, in modules. */
export interface Bars {
  bars: readonly { start: number; wide: number }[];
  modules: number;
}

/** One dot of a printer of 203 dots an inch (common practice of label printers, no published source), in millimetres. */
export const DOT_MM = 25.4 / 203;
/** ISO/IEC 18004: a quiet zone of four modules. */
export const QR_QUIET_MODULES = 4;
/** ISO/IEC 15417: a quiet zone of ten modules on both sides. */
export const BARS_QUIET_MODULES = 10;
/** A module is a whole number of dots, 0.5 mm at least on a tag; a larger one where there is room (look/tokens, Print). */
const FEWEST_DOTS = 4;
const MOST_DOTS = 5;
const TAG_QR_MOST_MM = 35;

/**
 * How many printer dots wide a module of a tag's QR code is, for a code of so many modules a side.
 *
 * @example qrDots(45) // 5: (45 + 8) x 5 x 0.125 mm = 33 mm
 */
export const qrDots = (count: number): number =>
  (count + 2 * QR_QUIET_MODULES) * MOST_DOTS * DOT_MM <= TAG_QR_MOST_MM ? MOST_DOTS : FEWEST_DOTS;

/** The side of a QR code with its quiet zone, in millimetres. */
export const qrSide = (qr: QrModules, dots: number): number => (qr.length + 2 * QR_QUIET_MODULES) * dots * DOT_MM;

/** Draws a QR code whose quiet zone begins at x, y. */
export function drawQr(pen: Pen, qr: QrModules, { x, y, dots }: { x: number; y: number; dots: number }): void {
  const module = dots * DOT_MM;
  const quiet = QR_QUIET_MODULES * module;
  const rectangles = qr.flatMap((line, row) =>
    stretches(line).map(([from, to]) => ({
      x: x + quiet + from * module,
      y: y + quiet + row * module,
      width: (to - from) * module,
      height: module,
    })),
  );
  pen.fill(...rectangles);
}

/** Where a row is dark: from, and up to. */
function stretches(line: readonly boolean[]): [number, number][] {
  const found: [number, number][] = [];
  line.forEach((dark, column) => {
    const last = found.at(-1);
    if (dark && last?.[1] === column) last[1] = column + 1;
    else if (dark) found.push([column, column + 1]);
  });
  return found;
}

/** The width of a bar code with its quiet zones, in millimetres. */
export const barsWidth = ({ modules }: Bars, dots: number): number => (modules + 2 * BARS_QUIET_MODULES) * dots * DOT_MM;

/** Draws a bar code whose quiet zone begins at x. */
export function drawBars(pen: Pen, { bars }: Bars, { x, y, height, dots }: { x: number; y: number; height: number; dots: number }): void {
  const module = dots * DOT_MM;
  pen.fill(...bars.map(({ start, wide }) => ({ x: x + (start + BARS_QUIET_MODULES) * module, y, width: wide * module, height })));
}

/**
 * What the bar code library is asked for: a QR code of error level M, as `codeCollector` takes it.
 *
 * @example qrcode(qrAsked('A'), codeCollector()).modules.length // 21
 */
export const qrAsked = (text: string) => ({ bcid: 'qrcode', text, eclevel: 'M', scale: 1 });

/**
 * What the bar code library is asked for: a Code 128, as `codeCollector` takes it.
 *
 * @example code128(barsAsked('0412'), codeCollector()).bars.modules // 57
 */
export const barsAsked = (text: string) => ({ bcid: 'code128', text, scale: 1 });

type Point = readonly [number, number];
/** The library draws a QR code's module two units wide. */
const UNITS_PER_MODULE = 2;

/**
 * Collects what the bar code library draws, so that paper, terminal and browser draw the same modules in their own ways. It has the shape
 * of that library's drawing context; `end` is called by the library.
 *
 * Assumes `scale: 1`, no padding and no text. Gives a QR code's modules, or a linear code's bars.
 *
 * @example qrcode({ bcid: 'qrcode', text: 'A', eclevel: 'M', scale: 1 }, codeCollector()).modules.length // 21
 */
export function codeCollector() {
  const polygons: Point[][] = [];
  const bars: { start: number; wide: number }[] = [];
  let width = 0;
  const nothing = (): void => undefined;
  return {
    scale: (): null => null,
    measure: () => ({ width: 0, ascent: 0, descent: 0 }),
    init: (wide: number): void => void (width = wide),
    line: (x: number, _y0: number, _x1: number, _y1: number, wide: number): void => {
      bars.push({ start: Math.floor(x - wide / 2), wide });
    },
    polygon: (points: Point[]): void => void polygons.push(points.map(([x, y]) => [x, y] as const)),
    hexagon: nothing,
    ellipse: nothing,
    fill: nothing,
    text: nothing,
    end: (): { modules: QrModules; bars: Bars } => ({
      modules: modulesOf(polygons, polygons.length > 0 ? width / UNITS_PER_MODULE : 0),
      bars: { bars, modules: width },
    }),
  };
}

/** A module is dark where its middle lies inside an odd number of outlines. */
function modulesOf(polygons: readonly (readonly Point[])[], count: number): QrModules {
  const rows = Array.from({ length: count }, () => new Array<boolean>(count).fill(false));
  for (let row = 0; row < count; row += 1) {
    const y = row * UNITS_PER_MODULE + 1;
    const crossings = polygons
      .flatMap((points) =>
        points.flatMap(([x, from], index) => {
          const to = (points[(index + 1) % points.length] ?? [0, 0])[1];
          return from < y !== to < y ? [x] : [];
        }),
      )
      .sort((a, b) => a - b);
    rows[row]?.forEach((_dark, column, cells) => {
      const x = column * UNITS_PER_MODULE + 1;
      cells[column] = crossings.filter((crossing) => crossing < x).length % 2 === 1;
    });
  }
  return rows;
}
