import { readFileSync } from 'node:fs';
import { createRequire } from 'node:module';
import PDFDocument from 'pdfkit';
import type { Mark, Paper } from '../../shared/paper/pages.js';
import { POINTS_PER_MM, type Face } from '../../shared/paper/type.js';

const mm = (millimetres: number): number => millimetres * POINTS_PER_MM;

const READING_FACE = 'atkinson-hyperlegible-next';
const MONO_FACE = 'jetbrains-mono';
/** Each face's package, weight and parts: a glyph is taken from the first part that has it. */
const FACES: Readonly<Record<Face, { family: string; weight: number; parts: readonly string[] }>> = {
  read: { family: READING_FACE, weight: 400, parts: ['latin', 'latin-ext'] },
  bold: { family: READING_FACE, weight: 700, parts: ['latin', 'latin-ext'] },
  heavy: { family: READING_FACE, weight: 800, parts: ['latin', 'latin-ext'] },
  mono: { family: MONO_FACE, weight: 400, parts: ['latin', 'latin-ext', 'greek', 'cyrillic', 'cyrillic-ext', 'vietnamese'] },
  monoBold: { family: MONO_FACE, weight: 700, parts: ['latin', 'latin-ext', 'greek', 'cyrillic', 'cyrillic-ext', 'vietnamese'] },
};

/** Widths are the sum of advance widths (shared/paper/type.ts), and no reading may turn into another glyph. */
const NO_FEATURES = { kern: false, liga: false, calt: false, clig: false } as unknown as PDFKit.Mixins.OpenTypeFeatures[];

/** What is printed, as a PDF: one page each, of its exact size, black on white. */
export async function paperPdf(paper: Paper, madeAt: Date): Promise<Buffer> {
  const doc = new PDFDocument({
    margin: 0,
    autoFirstPage: false,
    lang: 'en-GB',
    displayTitle: true,
    info: { Title: paper.title, CreationDate: madeAt },
  });
  const chunks: Buffer[] = [];
  doc.on('data', (chunk: Buffer) => chunks.push(chunk));
  const ended = new Promise<void>((done, failed) => doc.once('end', done).once('error', failed));
  const type = new Type(doc);
  for (const { widthMm, heightMm, marks } of paper.pages) {
    doc.addPage({ size: [mm(widthMm), mm(heightMm)], margin: 0 });
    for (const mark of marks) drawMark(doc, type, mark);
  }
  // A viewer that fits pages to the paper would make every millimetre wrong.
  const root = (doc as unknown as { _root: { data: Record<string, unknown> } })._root;
  const preferences = root.data['ViewerPreferences'] as { data: Record<string, unknown> } | undefined;
  if (preferences) preferences.data['PrintScaling'] = 'None';
  doc.end();
  await ended;
  return Buffer.concat(chunks);
}

/** The shipped faces, each part read from its package when the first glyph of it is set. */
class Type {
  readonly #doc: PDFKit.PDFDocument;
  readonly #resolve = createRequire(import.meta.url).resolve;
  readonly #opened = new Set<string>();

  constructor(doc: PDFKit.PDFDocument) {
    this.#doc = doc;
  }

  /** Sets a text from left to right, changing to another part of the face where a glyph needs it. */
  set(text: string, face: Face, points: number, x: number, baseline: number, options: PDFKit.Mixins.TextOptions = {}): void {
    let at = mm(x);
    for (const [part, piece] of this.#pieces(text, face)) {
      this.#doc.font(part).fontSize(points);
      this.#doc.text(piece, at, mm(baseline), { lineBreak: false, baseline: 'alphabetic', features: NO_FEATURES, ...options });
      at += this.#doc.widthOfString(piece, { features: NO_FEATURES });
    }
  }

  #pieces(text: string, face: Face): [string, string][] {
    const pieces: [string, string][] = [];
    for (const character of text) {
      const part = this.#partWith(character, face);
      const last = pieces.at(-1);
      if (last?.[0] === part) last[1] += character;
      else pieces.push([part, character]);
    }
    return pieces;
  }

  #partWith(character: string, face: Face): string {
    const { family, weight, parts } = FACES[face];
    const codePoint = character.codePointAt(0) ?? 0;
    for (const part of parts) {
      const name = `${family}-${part}-${weight}`;
      if (!this.#opened.has(name)) {
        this.#doc.registerFont(name, readFileSync(this.#resolve(`@fontsource/${family}/files/${name}-normal.woff`)));
        this.#opened.add(name);
      }
      this.#doc.font(name);
      const { font } = (this.#doc as unknown as { _font: { font: { hasGlyphForCodePoint(codePoint: number): boolean } } })._font;
      if (font.hasGlyphForCodePoint(codePoint)) return name;
    }
    throw new Error(`No shipped part of the face ${face} has the glyph U+${codePoint.toString(16)}: readableText should have replaced it.`);
  }
}

function drawMark(doc: PDFKit.PDFDocument, type: Type, mark: Mark): void {
  switch (mark.kind) {
    case 'text':
      doc.fillColor(mark.white ? 'white' : 'black');
      type.set(mark.text, mark.face, mark.points, mark.x, mark.baseline);
      return;
    case 'line':
      doc.moveTo(mm(mark.x1), mm(mark.y1)).lineTo(mm(mark.x2), mm(mark.y2)).lineWidth(mm(mark.thick)).stroke('black');
      return;
    case 'rectangles':
      for (const { x, y, width, height } of mark.rectangles) doc.rect(mm(x), mm(y), mm(width), mm(height));
      doc.fill('black');
      return;
    case 'frame': {
      const { x, y, width, height } = mark.rectangle;
      const inset = mark.thick / 2;
      doc
        .rect(mm(x + inset), mm(y + inset), mm(width - mark.thick), mm(height - mark.thick))
        .lineWidth(mm(mark.thick))
        .stroke('black');
      return;
    }
    case 'shape':
      doc.save().translate(mm(mark.x), mm(mark.y)).scale(mm(mark.scale)).path(mark.path);
      if (mark.thick === undefined) doc.fill(mark.white ? 'white' : 'black', 'even-odd');
      else doc.lineWidth(mark.thick / mark.scale).stroke('black');
      doc.restore();
      return;
    case 'circle':
      doc.circle(mm(mark.x), mm(mark.y), mm(mark.radius)).lineWidth(mm(mark.thick));
      if (mark.dash) doc.dash(mm(mark.dash.on), { space: mm(mark.dash.off) });
      if (mark.filled) doc.fillAndStroke('black', 'black');
      else doc.stroke('black');
      doc.undash();
      return;
    case 'across':
      doc.save().rotate(mark.degrees, { origin: [mm(mark.x), mm(mark.y)] });
      doc.lineWidth(mm(mark.thick)).strokeColor('black');
      type.set(mark.text, mark.face, mark.points, mark.x - mark.widthMm / 2, mark.y + mark.drop, {
        stroke: true,
        fill: false,
      });
      doc.restore();
  }
}
