import { BOLD_WIDTHS, HEAVY_WIDTHS, MONO_RANGES, MONO_WIDTH, READ_WIDTHS, type WidthBlock } from './glyph-widths.js';

/** Points in a millimetre: a point is 1/72 inch. */
export const POINTS_PER_MM = 72 / 25.4;

/** The faces that are printed: the reading face in three weights, the mono face in two. */
export type Face = 'read' | 'bold' | 'heavy' | 'mono' | 'monoBold';

/** One piece of text in one face, every glyph of which that face has. */
export interface Run {
  text: string;
  face: Face;
}

const WIDTHS: Readonly<Record<'read' | 'bold' | 'heavy', ReadonlyMap<number, number>>> = {
  read: widthsByCodePoint(READ_WIDTHS),
  bold: widthsByCodePoint(BOLD_WIDTHS),
  heavy: widthsByCodePoint(HEAVY_WIDTHS),
};

function widthsByCodePoint(blocks: readonly WidthBlock[]): ReadonlyMap<number, number> {
  const widths = new Map<number, number>();
  for (const { from, widths: all } of blocks) for (const [index, width] of all.entries()) if (width > 0) widths.set(from + index, width);
  return widths;
}

const isMono = (face: Face): face is 'mono' | 'monoBold' => face === 'mono' || face === 'monoBold';
const inMono = (codePoint: number): boolean => MONO_RANGES.some(([first, last]) => codePoint >= first && codePoint <= last);
const inRead = (codePoint: number): boolean => WIDTHS.read.has(codePoint);
const printable = (character: string): boolean => {
  const codePoint = character.codePointAt(0) ?? 0;
  return inRead(codePoint) || inMono(codePoint);
};

/**
 * Any text in glyphs that the shipped faces have, so that nothing vanishes on paper.
 *
 * Blanks and line ends become one space, invisible signs go. A letter that no face has is written by its compatibility form (full width
 * as usual width), else without its mark, else by its code points in brackets: not pretty, but it can be told apart and looked up.
 *
 * @example readableText('Łódź ｗａｓｈ') // 'Łódź wash'
 * @example readableText('海尔 X1') // '[U+6D77 5C14] X1'
 */
export function readableText(text: string): string {
  let shown = '';
  let unknown: string[] = [];
  const tellUnknown = (): void => {
    if (unknown.length > 0) shown += `[U+${unknown.join(' ')}]`;
    unknown = [];
  };
  const clean = text
    .normalize('NFC')
    .replace(/\s+/gu, ' ')
    .replace(/[\p{Cc}\p{Cf}\p{Variation_Selector}]/gu, '');
  for (const character of clean) {
    const inGlyphs = glyphsFor(character);
    if (inGlyphs === undefined) unknown.push((character.codePointAt(0) ?? 0).toString(16).toUpperCase().padStart(4, '0'));
    else {
      tellUnknown();
      shown += inGlyphs;
    }
  }
  tellUnknown();
  return shown;
}

function glyphsFor(character: string): string | undefined {
  if (printable(character)) return character;
  const forms = [character.normalize('NFKC'), character.normalize('NFKD').replace(/\p{M}/gu, '')];
  return forms.find((form) => form !== '' && [...form].every(printable));
}

/**
 * Readable text as runs: a glyph that the face lacks (Ω and µ in the reading face, Cyrillic) stands in the mono face of like weight.
 *
 * @example runsOf('12 Ω', 'read') // [{text: '12 ', face: 'read'}, {text: 'Ω', face: 'mono'}]
 */
export function runsOf(text: string, face: Face): Run[] {
  const runs: Run[] = [];
  for (const character of readableText(text)) {
    const codePoint = character.codePointAt(0) ?? 0;
    const used = faceFor(codePoint, face);
    const last = runs.at(-1);
    if (last?.face === used) last.text += character;
    else runs.push({ text: character, face: used });
  }
  return runs;
}

function faceFor(codePoint: number, face: Face): Face {
  if (isMono(face)) return inMono(codePoint) ? face : face === 'mono' ? 'read' : 'bold';
  if (inRead(codePoint)) return face;
  return face === 'read' ? 'mono' : 'monoBold';
}

/**
 * How wide a text is, in millimetres, set without kerning and ligatures: the sum of its glyphs' advance widths.
 *
 * @example widthMm('0412', 'mono', 10) // 4 glyphs of 0.6 x 10 points = 8.47 mm
 */
export function widthMm(text: string, face: Face, points: number): number {
  return runsOf(text, face).reduce((sum, run) => sum + runWidthMm(run, points), 0);
}

/** The width of one run, in millimetres. Assumes that its face has every glyph of it (`runsOf`). */
export function runWidthMm({ text, face }: Run, points: number): number {
  let thousandths = 0;
  for (const character of text) {
    thousandths += isMono(face) ? MONO_WIDTH : (WIDTHS[face].get(character.codePointAt(0) ?? 0) ?? 0);
  }
  return (thousandths / 1000) * (points / POINTS_PER_MM);
}
