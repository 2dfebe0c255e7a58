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

/** A page as dots, four bytes each: red, green, blue, opacity. */
export interface Picture {
  width: number;
  height: number;
  data: Uint8ClampedArray;
}

/** Every page as a picture of a printer's resolution. */
export const picturesOf = (pdf: Buffer, dpi = LABEL_PRINTER_DPI): Picture[] =>
  withFile(pdf, (file, folder) => {
    execFileSync('pdftoppm', ['-r', String(dpi), file, join(folder, 'page')]);
    return readdirSync(folder)
      .filter((name) => name.endsWith('.ppm'))
      .sort()
      .map((name) => readPpm(readFileSync(join(folder, name))));
  });

/** A portable pixmap: `P6`, width, height, 255, then three bytes a dot. */
function readPpm(bytes: Buffer): Picture {
  const [head = '', w, h] = /^P6\s+(\d+)\s+(\d+)\s+255\s/.exec(bytes.subarray(0, 40).toString('latin1')) ?? [];
  const [width, height] = [Number(w), Number(h)];
  const data = new Uint8ClampedArray(width * height * 4).fill(255);
  for (let from = head.length, to = 0; from < bytes.length; from += 3, to += 4) {
    data[to] = bytes[from] ?? 0;
    data[to + 1] = bytes[from + 1] ?? 0;
    data[to + 2] = bytes[from + 2] ?? 0;
  }
  return { width, height, data };
}

/** A part of a picture, in dots. */
export function partOf({ width: wide, data }: Picture, left: number, top: number, width: number, height: number): Picture {
  const part = new Uint8ClampedArray(width * height * 4);
  for (let y = 0; y < height; y += 1) {
    const from = ((y + top) * wide + left) * 4;
    part.set(data.subarray(from, from + width * 4), y * width * 4);
  }
  return { width, height, data: part };
}

/** What a QR code on a picture says, by a library other than the one that drew it; undefined where none is found. */
export const readQr = ({ data, width, height }: Picture): string | undefined =>
  jsQR.default(data, width, height, { inversionAttempts: 'dontInvert' })?.data;

/** What a Code 128 on a picture says. */
export function readBars({ data, width, height }: Picture): string {
  const greys = new Uint8ClampedArray(width * height);
  for (let at = 0; at < greys.length; at += 1) greys[at] = data[at * 4] ?? 0;
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
const dark = ({ data, width }: Picture, x: number, y: number): boolean => (data[(y * width + x) * 4] ?? 255) < 128;

/** How far the outermost dark dot stays away from the nearest edge, in millimetres. */
export function marginMm(picture: Picture, dpi = LABEL_PRINTER_DPI): number {
  let least = Infinity;
  for (let y = 0; y < picture.height; y += 1)
    for (let x = 0; x < picture.width; x += 1)
      if (dark(picture, x, y)) least = Math.min(least, x, y, picture.width - 1 - x, picture.height - 1 - y);
  return (least / dpi) * 25.4;
}

/** Colours on a picture other than greys: paper is black on white. */
export const colouredDots = ({ data }: Picture): number => {
  let count = 0;
  for (let at = 0; at < data.length; at += 4) if (data[at] !== data[at + 1] || data[at] !== data[at + 2]) count += 1;
  return count;
};

/** What part of the dark dots of one picture has no dark dot of the other so near. */
export function strayPart(one: Picture, other: Picture, dotsAway: number): number {
  let [all, stray] = [0, 0];
  const near = (x: number, y: number): boolean => {
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
