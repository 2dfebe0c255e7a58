// Paper as a printer and a phone see it: page sizes, text and pictures by poppler, codes read by libraries that did not draw them.
import { execFileSync } from 'node:child_process';
import { mkdtempSync, readFileSync, readdirSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import jsQR from 'jsqr';
import {
  BarcodeFormat,
  BinaryBitmap,
  DecodeHintType,
  HybridBinarizer,
  MultiFormatReader,
  RGBLuminanceSource,
  type Result,
} from '@zxing/library';

/** Label printers have 203 dots an inch, 8 a millimetre (common practice, no published source). */
export const LABEL_PRINTER_DPI = 203;

function withFile<T>(pdf: Buffer, work: (file: string, folder: string) => T): T {
  const folder = mkdtempSync(join(tmpdir(), 'refettle-paper-'));
  try {
    const file = join(folder, 'paper.pdf');
    writeFileSync(file, pdf);
    return work(file, folder);
  } finally {
    rmSync(folder, { recursive: true, force: true });
  }
}

/** The media box of every page in points, as poppler reads it. */
export const pageSizes = (pdf: Buffer): { width: number; height: number }[] =>
  withFile(pdf, (file) => {
    const said = execFileSync('pdfinfo', ['-f', '1', '-l', '999', '-box', file], { encoding: 'utf8' });
    return [...said.matchAll(/^Page\s+\d+ MediaBox:\s+0\.00\s+0\.00\s+([\d.]+)\s+([\d.]+)$/gm)].map(([, width, height]) => ({
      width: Number(width),
      height: Number(height),
    }));
  });

/** The words of all pages, blanks and lines made one space. */
export const wordsOnPaper = (pdf: Buffer): string =>
  withFile(pdf, (file) => execFileSync('pdftotext', ['-layout', file, '-'], { encoding: 'utf8' }).replace(/\s+/g, ' ').trim());

/** A page as dots: a byte each, from black (0) to white. */
export interface Picture {
  width: number;
  height: number;
  greys: Uint8ClampedArray<ArrayBuffer>;
  /** So many dots were no grey; unknown where it was drawn in greys. */
  coloured?: number;
}

/** Every page as a picture of a printer's resolution; in greys where nobody asks for colours, which takes half the time. */
export const picturesOf = (pdf: Buffer, { dpi = LABEL_PRINTER_DPI, inGreys = false } = {}): Picture[] =>
  withFile(pdf, (file, folder) => {
    execFileSync('pdftoppm', ['-r', String(dpi), ...(inGreys ? ['-gray'] : []), file, join(folder, 'page')]);
    return readdirSync(folder)
      .filter((name) => /\.p[gp]m$/.test(name))
      .sort()
      .map((name) => readPortableMap(readFileSync(join(folder, name))));
  });

/** A portable pixmap or greymap: `P6` or `P5`, width, height, 255, then three bytes a dot or one. */
function readPortableMap(bytes: Buffer): Picture {
  const [head = '', kind, w, h] = /^(P[56])\s+(\d+)\s+(\d+)\s+255\s/.exec(bytes.subarray(0, 40).toString('latin1')) ?? [];
  const [width, height] = [Number(w), Number(h)];
  const dots = bytes.subarray(head.length);
  if (kind === 'P5') return { width, height, greys: new Uint8ClampedArray(dots) };
  const greys = new Uint8ClampedArray(width * height);
  let coloured = 0;
  for (let from = 0, to = 0; to < greys.length; from += 3, to += 1) {
    const red = dots[from] ?? 0;
    if (red !== dots[from + 1] || red !== dots[from + 2]) coloured += 1;
    greys[to] = red;
  }
  return { width, height, greys, coloured };
}

/** A part of a picture, in dots. */
export function partOf({ width: wide, greys }: Picture, left: number, top: number, width: number, height: number): Picture {
  const part = new Uint8ClampedArray(width * height);
  for (let y = 0; y < height; y += 1) {
    const from = (y + top) * wide + left;
    part.set(greys.subarray(from, from + width), y * width);
  }
  return { width, height, greys: part };
}

/** What a QR code on a picture says, by a library other than the one that drew it; undefined where none is found. */
export function readQr({ greys, width, height }: Picture): string | undefined {
  const data = new Uint8ClampedArray(greys.length * 4).fill(255);
  for (let at = 0; at < greys.length; at += 1) data[at * 4] = data[at * 4 + 1] = data[at * 4 + 2] = greys[at] ?? 0;
  return jsQR.default(data, width, height, { inversionAttempts: 'dontInvert' })?.data;
}

/** What a Code 128 on a picture says. */
export function readBars({ greys, width, height }: Picture): string {
  const hints = new Map<DecodeHintType, unknown>([
    [DecodeHintType.POSSIBLE_FORMATS, [BarcodeFormat.CODE_128]],
    [DecodeHintType.TRY_HARDER, true],
  ]);
  const reader = new MultiFormatReader();
  reader.setHints(hints);
  const result: Result = reader.decode(new BinaryBitmap(new HybridBinarizer(new RGBLuminanceSource(greys, width, height))));
  return result.getText();
}

/** Whether a pixel is dark. */
const dark = ({ greys, width }: Picture, x: number, y: number): boolean => (greys[y * width + x] ?? 255) < 128;

/** How far the outermost dark dot stays away from the nearest edge, in millimetres. */
export function marginMm(picture: Picture, dpi = LABEL_PRINTER_DPI): number {
  let least = Infinity;
  for (let y = 0; y < picture.height; y += 1)
    for (let x = 0; x < picture.width; x += 1)
      if (dark(picture, x, y)) least = Math.min(least, x, y, picture.width - 1 - x, picture.height - 1 - y);
  return (least / dpi) * 25.4;
}

/** What part of the dark dots of one picture has no dark dot of the other so near. */
export function strayPart(one: Picture, other: Picture, dotsAway: number): number {
  let [all, stray] = [0, 0];
  const near = (x: number, y: number): boolean => {
    // Nearly always the very same dot.
    if (dark(other, x, y)) return true;
    for (let v = Math.max(0, y - dotsAway); v <= Math.min(other.height - 1, y + dotsAway); v += 1)
      for (let u = Math.max(0, x - dotsAway); u <= Math.min(other.width - 1, x + dotsAway); u += 1) if (dark(other, u, v)) return true;
    return false;
  };
  for (let y = 0; y < one.height; y += 1)
    for (let x = 0; x < one.width; x += 1) {
      if (!dark(one, x, y)) continue;
      all += 1;
      if (!near(x, y)) stray += 1;
    }
  return stray / Math.max(1, all);
}
