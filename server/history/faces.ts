import type { DecodeAnswer } from '../../shared/decode/answer.js';
import { lampFace, type LampFace } from '../../shared/lamps/face.js';
import type { Sheet } from '../../shared/sheet/schema.js';

/** The codes that an answer names, those that it only takes for possible among them. */
export const codesNamed = ({ codes, segments }: DecodeAnswer): string[] =>
  [...codes, ...segments.flatMap((segment) => (segment.kind === 'unreadable' ? segment.candidates : []))].map(({ code }) => code);

/** A lamp face for each of these codes that the sheet can draw. */
export function facesOf(codes: readonly string[], sheet: Sheet | undefined): Record<string, LampFace> {
  const faces = [...new Set(codes)].map((code) => [code, sheet && lampFace(code, sheet)] as const);
  return Object.fromEntries(faces.filter((entry): entry is readonly [string, LampFace] => entry[1] !== undefined));
}
