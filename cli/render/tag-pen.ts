import { readFileSync } from 'node:fs';
import { createRequire } from 'node:module';
import PDFDocument from 'pdfkit';

const POINTS_PER_MM = 72 / 25.4;
export const mm = (millimetres: number): number => millimetres * POINTS_PER_MM;

const FACES = {
  read: '@fontsource/atkinson-hyperlegible-next/files/atkinson-hyperlegible-next-latin-400-normal.woff',
  bold: '@fontsource/atkinson-hyperlegible-next/files/atkinson-hyperlegible-next-latin-700-normal.woff',
  heavy: '@fontsource/atkinson-hyperlegible-next/files/atkinson-hyperlegible-next-latin-800-normal.woff',
  mono: '@fontsource/jetbrains-mono/files/jetbrains-mono-latin-400-normal.woff',
  monoBold: '@fontsource/jetbrains-mono/files/jetbrains-mono-latin-700-normal.woff',
  greek: '@fontsource/jetbrains-mono/files/jetbrains-mono-greek-400-normal.woff',
} as const;
export type Face = keyof typeof FACES;

/** The smallest type on a tag: thermal printers have 8 dots a mm (look/tokens, Print). */
export const SMALLEST_POINTS = 7;
/** No reading may turn into another glyph. */
const NO_LIGATURES = { liga: false, calt: false, clig: false } as unknown as PDFKit.Mixins.OpenTypeFeatures[];

/** One piece of text in one face. */
export interface Run {
  text: string;
  face: Face;
}

/** Draws in millimetres on a black and white page. */
export class TagPen {
  readonly doc: PDFKit.PDFDocument;

  constructor(size: { width: number; height: number }, about: { title: string; madeAt: Date }) {
    this.doc = new PDFDocument({
      size: [mm(size.width), mm(size.height)],
      margin: 0,
      autoFirstPage: false,
      lang: 'en-GB',
      displayTitle: true,
      info: { Title: about.title, CreationDate: about.madeAt },
    });
    const { resolve } = createRequire(import.meta.url);
    for (const [face, file] of Object.entries(FACES)) this.doc.registerFont(face, readFileSync(resolve(file)));
  }

  /** The pages, as a file. */
  async finish(): Promise<Buffer> {
    const chunks: Buffer[] = [];
    this.doc.on('data', (chunk: Buffer) => chunks.push(chunk));
    const ended = new Promise<void>((done, failed) => this.doc.once('end', done).once('error', failed));
    this.doc.end();
    await ended;
    return Buffer.concat(chunks);
  }

  widthOf(text: string, face: Face, points: number): number {
    return (
      this.#runs([{ text, face }]).reduce(
        (sum, run) => sum + this.doc.font(run.face).fontSize(points).widthOfString(run.text, { features: NO_LIGATURES }),
        0,
      ) / POINTS_PER_MM
    );
  }

  /** Text whose baseline stands at y. `right` and `centre` say what x is. Gives the width. */
  text(text: string, x: number, y: number, face: Face, points: number, align: 'left' | 'right' | 'centre' = 'left'): number {
    const width = this.widthOf(text, face, points);
    let at = align === 'left' ? x : align === 'right' ? x - width : x - width / 2;
    for (const run of this.#runs([{ text, face }])) {
      this.doc.font(run.face).fontSize(points).fillColor('black');
      this.doc.text(run.text, mm(at), mm(y), { lineBreak: false, baseline: 'alphabetic', features: NO_LIGATURES });
      at += this.doc.widthOfString(run.text, { features: NO_LIGATURES }) / POINTS_PER_MM;
    }
    return width;
  }

  /** White on whatever is there. */
  reversed(text: string, x: number, y: number, face: Face, points: number): void {
    this.doc
      .font(face)
      .fontSize(points)
      .fillColor('white')
      .text(text, mm(x), mm(y), { lineBreak: false, baseline: 'alphabetic', features: NO_LIGATURES });
    this.doc.fillColor('black');
  }

  /** As large as asked, smaller where it would not fit, never below the smallest type; then it is cut. */
  fit(text: string, x: number, y: number, face: Face, points: number, width: number, align: 'left' | 'right' = 'left'): void {
    let size = points;
    while (size > SMALLEST_POINTS && this.widthOf(text, face, size) > width) size -= 0.25;
    let shown = text;
    while (this.widthOf(shown, face, size) > width && shown.length > 1) shown = shown.slice(0, -1);
    this.text(shown, x, y, face, size, align);
  }

  /** Runs of words over as many lines as they need; gives the baseline below the last one. */
  paragraph(runs: readonly Run[], x: number, y: number, points: number, width: number, lineHeight: number): number {
    let baseline = y;
    let at = x;
    for (const { face, text } of runs) {
      for (const word of text.split(/(?<= )/)) {
        const wide = this.widthOf(word.trimEnd(), face, points);
        if (at > x && at + wide > x + width) {
          at = x;
          baseline += lineHeight;
        }
        this.text(word, at, baseline, face, points);
        at += this.widthOf(word, face, points);
      }
    }
    return baseline + lineHeight;
  }

  line(x1: number, y1: number, x2: number, y2: number, width: number): void {
    this.doc.moveTo(mm(x1), mm(y1)).lineTo(mm(x2), mm(y2)).lineWidth(mm(width)).stroke('black');
  }

  /** An SVG path in millimetres (or in units of `scale` millimetres), moved to x, y. */
  shape(
    path: string,
    { x = 0, y = 0, scale = 1, fill = false, stroke = 0 }: { x?: number; y?: number; scale?: number; fill?: boolean; stroke?: number },
  ): void {
    this.doc.save().translate(mm(x), mm(y)).scale(mm(scale));
    this.doc.path(path);
    if (fill) this.doc.fill('black', 'even-odd');
    else this.doc.lineWidth(stroke / scale).stroke('black');
    this.doc.restore();
  }

  /** Ohms are in the Greek part of the mono face only. */
  #runs(runs: readonly Run[]): Run[] {
    return runs.flatMap(({ text, face }) =>
      text
        .split(/(Ω)/)
        .filter(Boolean)
        .map((piece): Run => ({ text: piece.replace('\u2212', '-'), face: piece === 'Ω' ? 'greek' : face })),
    );
  }
}
