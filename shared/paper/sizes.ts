/** A tag's own form: its paper, how far its outline stays away from the edge, and the text from the outline. Millimetres. */
export interface TagForm {
  width: number;
  height: number;
  edge: number;
  padding: number;
  /** A card is punched by hand; a label is stuck on, its hole is only drawn. */
  hole: 'punch' | 'ring';
}

/** What a tag can be printed on. */
export const TAG_FORMATS = ['a6', '4x6', 'a4', 'letter'] as const;
export type TagFormat = (typeof TAG_FORMATS)[number];

/** Edge 2.5 mm (look/tokens, Print). A card printer and a label printer of four inches print that far out (common practice, no published source). */
const A6: TagForm = { width: 105, height: 148, edge: 2.5, padding: 4, hole: 'punch' };
const FOUR_BY_SIX: TagForm = { width: 101.6, height: 152.4, edge: 2.5, padding: 2.6, hole: 'ring' };

/**
 * An office printer leaves a sixth of an inch (4.23 mm) white all round (common practice, no published source), and half the width of the
 * outline lies outside its middle.
 */
const OFFICE_EDGE = 4.6;
const quarterOf = (width: number, height: number): TagForm => ({
  width: width / 2,
  height: height / 2,
  edge: OFFICE_EDGE,
  padding: 3,
  hole: 'punch',
});

interface TagSheetSize {
  name: string;
  width: number;
  height: number;
  form: TagForm;
  /** How many tags across and down. */
  across: number;
  down: number;
}

/** ISO 216: A4 is 210 x 297 mm, A6 is 105 x 148 mm. ANSI letter is 8.5 x 11 in. */
export const TAG_SHEETS: Readonly<Record<TagFormat, TagSheetSize>> = {
  a6: { name: 'A6', width: 105, height: 148, form: A6, across: 1, down: 1 },
  '4x6': { name: '4 x 6 in', width: 101.6, height: 152.4, form: FOUR_BY_SIX, across: 1, down: 1 },
  a4: { name: 'A4, four tags a sheet', width: 210, height: 297, form: quarterOf(210, 297), across: 2, down: 2 },
  letter: { name: 'letter, four tags a sheet', width: 215.9, height: 279.4, form: quarterOf(215.9, 279.4), across: 2, down: 2 },
};

export interface LabelSize {
  width: number;
  height: number;
}

/** Rolls that label printers are sold with (common practice, no published source). Width across the text, height, in millimetres. */
export const LABEL_FORMATS = ['62x29', '54x25', '57x32', '89x36', '100x50', '101.6x76.2'] as const;
export type LabelFormat = (typeof LABEL_FORMATS)[number];
export const USUAL_LABEL: LabelFormat = '62x29';

/** Below this neither a code that can be scanned nor a number to read at arm's length has room. */
export const SMALLEST_LABEL: LabelSize = { width: 40, height: 20 };
export const LARGEST_LABEL: LabelSize = { width: 210, height: 297 };

/**
 * A label's size as it is written: width by height in millimetres. Undefined where it is none, or smaller or larger than what can be drawn.
 *
 * @example readLabelSize('62x29') // { width: 62, height: 29 }
 */
export function readLabelSize(text: string): LabelSize | undefined {
  const [, wide, high] = /^(\d{1,3}(?:\.\d{1,2})?)\s*[x×]\s*(\d{1,3}(?:\.\d{1,2})?)$/i.exec(text.trim()) ?? [];
  const size = { width: Number(wide), height: Number(high) };
  const fits =
    size.width >= SMALLEST_LABEL.width &&
    size.height >= SMALLEST_LABEL.height &&
    size.width <= LARGEST_LABEL.width &&
    size.height <= LARGEST_LABEL.height;
  return wide !== undefined && fits ? size : undefined;
}
