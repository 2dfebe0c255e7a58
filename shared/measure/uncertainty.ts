import type { Accuracy } from './parse-accuracy.js';

/** What a reading's uncertainty comes to, all in the reading's own unit. */
export interface Uncertainty {
  /** Half-width a of the interval that the data sheet promises. */
  halfWidth: number;
  /** Standard uncertainty u. */
  standard: number;
  /** Expanded uncertainty U = K·u. */
  expanded: number;
}

/** Used unless told: about 95 % of a normal distribution (JCGM 100, 6.3). */
export const USUAL_COVERAGE_FACTOR = 2;

/**
 * How far a meter may be off at one reading, from the accuracy on its data sheet.
 *
 * The half-width is a = A/100·|value| + D·resolution. Within it every value is taken to be equally likely (a rectangular
 * distribution), so u = a/√3 and U = K·u. `value` and `resolution` are in the same unit; `resolution` is the value of one digit.
 * Assumes that the inputs were checked (no negative accuracy or resolution). Source: JCGM 100:2008, 4.3.7; contract, section 4.
 *
 * @example readingUncertainty(2, { percentOfReading: 0.5, digits: 3 }, 0.001).halfWidth // 0.013
 */
export function readingUncertainty(
  value: number,
  accuracy: Accuracy,
  resolution: number,
  coverageFactor: number = USUAL_COVERAGE_FACTOR,
): Uncertainty {
  const halfWidth = (accuracy.percentOfReading / 100) * Math.abs(value) + accuracy.digits * resolution;
  const standard = halfWidth / Math.sqrt(3);
  return { halfWidth, standard, expanded: coverageFactor * standard };
}
