import type { WeightedPhases } from '../sheet/schema.js';

/**
 * The code as the sheet writes it.
 *
 * @example codeText({…, code: 'G{on}K{off}'}, 5, 3) // 'G5K3'
 */
export function codeText(coding: WeightedPhases, onDigit: number, offDigit: number): string {
  return coding.code.replaceAll('{on}', String(onDigit)).replaceAll('{off}', String(offDigit));
}
