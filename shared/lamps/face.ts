import { z } from 'zod';
import type { Sheet } from '../sheet/schema.js';
import { lampColourSchema } from '../sheet/schema.js';

/** A lamp face: the row of lamps as the technician sees it, each phase a row. */
export const faceSchema = z.strictObject({
  code: z.string(),
  title: z.string().optional(),
  lamps: z.array(
    z.strictObject({
      id: z.string(),
      label: z.string(),
      colour: lampColourSchema,
      group: z.enum(['weighted', 'selector', 'outside']),
      weight: z.number().optional(),
    }),
  ),
  rows: z.array(
    z.strictObject({
      letter: z.string(),
      /** One a lamp, in panel order. `null`: a lamp outside the code, which may do anything. */
      lit: z.array(z.boolean().nullable()),
      digit: z.number(),
      /** The lit lamps' weights, largest first: `4 + 1 = 5` has [4, 1]. */
      terms: z.array(z.number()),
    }),
  ),
});
export type LampFace = z.infer<typeof faceSchema>;

/** The digits in a code's text, by the pattern of the sheet's coding; undefined when the text is no such code. */
function digitsOf(code: string, pattern: string): { on: number; off: number } | undefined {
  const escaped = pattern
    .replace(/[.*+?^$()|[\]\\]/g, '\\$&')
    .replace('{on}', '(?<on>\\d+)')
    .replace('{off}', '(?<off>\\d+)');
  const match = new RegExp(`^${escaped}$`).exec(code);
  return match?.groups?.on !== undefined && match.groups.off !== undefined
    ? { on: Number(match.groups.on), off: Number(match.groups.off) }
    : undefined;
}

/** The lamps whose weights add up to a digit, largest first. Weights of a checked sheet give each digit one way (binary: 8, 4, 2, 1). */
function termsOf(digit: number, weights: readonly number[]): number[] | undefined {
  const sorted = [...weights].sort((a, b) => b - a);
  const search = (rest: number, from: number): number[] | undefined => {
    if (rest === 0) return [];
    for (let i = from; i < sorted.length; i++) {
      const weight = sorted[i] as number;
      if (weight > rest) continue;
      const found = search(rest - weight, i + 1);
      if (found) return [weight, ...found];
    }
    return undefined;
  };
  return search(digit, 0);
}

/**
 * The lamp face of a code: which lamps are lit in which phase, and the sum they make.
 *
 * Takes a code as decoded and the unit's service sheet; gives undefined for a code the sheet's coding cannot show,
 * and for codings that have no face yet (only weighted phases have one).
 *
 * @example lampFace('G5K3', heron)?.rows[0] // { letter: 'G', lit: [true, false, true, false, true, null], digit: 5, terms: [4, 1] }
 */
export function lampFace(code: string, sheet: Sheet): LampFace | undefined {
  const { coding } = sheet;
  if (coding.kind !== 'weighted-phases') return undefined;
  const digits = digitsOf(code, coding.code);
  if (!digits) return undefined;
  const rows: LampFace['rows'] = [];
  for (const phase of ['on', 'off'] as const) {
    const terms = termsOf(digits[phase], Object.values(coding.weights));
    if (!terms) return undefined;
    const lit = sheet.lamps.map(({ id }) => {
      if (id === coding.selector) return phase === 'on';
      const weight = coding.weights[id];
      return weight === undefined ? null : terms.includes(weight);
    });
    rows.push({ letter: coding.letters?.[phase] ?? '', lit, digit: digits[phase], terms });
  }
  const title = sheet.faults.find((fault) => fault.code === code)?.title;
  return {
    code,
    ...(title === undefined ? {} : { title }),
    lamps: sheet.lamps.map((lamp) => {
      const weight = coding.weights[lamp.id];
      return {
        ...lamp,
        group: lamp.id === coding.selector ? 'selector' : weight === undefined ? 'outside' : 'weighted',
        ...(weight === undefined ? {} : { weight }),
      };
    }),
    rows,
  };
}
