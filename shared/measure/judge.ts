import { z } from 'zod';
import { BadInputError } from '../errors.js';
import { conformanceProbability } from './conformance-probability.js';
import type { Accuracy } from './parse-accuracy.js';
import { NOT_A_READING_FROM } from './scpi-value.js';
import { readingUncertainty, USUAL_COVERAGE_FACTOR } from './uncertainty.js';

/** What a single reading can come to. */
export const readingVerdictSchema = z.enum(['pass', 'fail', 'inconclusive']);
export type ReadingVerdict = z.infer<typeof readingVerdictSchema>;

/** A judged reading, as `refettle judge --json` prints it and the API stores it. Numbers are unrounded, in `unit`; a limit that was not given is absent. */
export const judgementSchema = z.strictObject({
  value: z.number(),
  unit: z.string(),
  low: z.number().optional(),
  high: z.number().optional(),
  standardUncertainty: z.number().nonnegative(),
  coverageFactor: z.number().positive(),
  expandedUncertainty: z.number().nonnegative(),
  guardBand: z.number().nonnegative(),
  conformanceProbability: z.number().min(0).max(1),
  verdict: readingVerdictSchema,
});
export type Judgement = z.infer<typeof judgementSchema>;

/** One reading to be judged; everything in `unit`. `resolution` is the value of the meter's last digit. */
export interface ReadingToJudge {
  value: number;
  unit: string;
  low?: number | undefined;
  high?: number | undefined;
  accuracy: Accuracy;
  resolution: number;
  coverageFactor?: number | undefined;
}

/**
 * Says whether one reading lies inside its limits, when the meter that took it is only so good.
 *
 * U is the reading's expanded uncertainty, and the guard band is U (ILAC-G8:09/2019, 4.2.3 with w = U). Inside the limits by
 * more than U: `pass`. Outside by more than U: `fail`. Anything else, both boundaries included: `inconclusive`. With u = 0
 * there is nothing in between: inside or on a limit `pass`, else `fail`.
 *
 * Round-off: a reading whose distance from a limit equals U but for the last bits of the arithmetic counts as on the boundary,
 * so it is inconclusive; 3.5 − 3.36 is not "more than 0.14" although the machine's subtraction says so.
 *
 * Refuses (BadInputError): no limit at all, low above high, a negative accuracy or resolution, a coverage factor not above 0,
 * a value of 9.9e37 or more (SCPI: no reading), and anything that is no finite number. Low equal to high is allowed.
 * Source: JCGM 100, JCGM 106, ILAC-G8; contract, section 4.
 *
 * @example judge({ value: 12410, unit: 'ohm', low: 11400, high: 12600, accuracy: { percentOfReading: 0.8, digits: 3 }, resolution: 10 }).verdict // 'pass'
 */
export function judge(reading: ReadingToJudge): Judgement {
  const { value, unit, low, high, accuracy, resolution, coverageFactor = USUAL_COVERAGE_FACTOR } = reading;
  refuseNonsense(reading, coverageFactor);
  const { standard, expanded } = readingUncertainty(value, accuracy, resolution, coverageFactor);
  if (!Number.isFinite(expanded))
    throw new BadInputError('the uncertainty is larger than any number: look at the accuracy and the resolution');
  return {
    value,
    unit,
    ...(low === undefined ? {} : { low }),
    ...(high === undefined ? {} : { high }),
    standardUncertainty: standard,
    coverageFactor,
    expandedUncertainty: expanded,
    guardBand: expanded,
    conformanceProbability: conformanceProbability({ value, standardUncertainty: standard, low, high }),
    verdict: verdictFor(value, expanded, low, high),
  };
}

/** Relative round-off of two decimals read as binary numbers, subtracted, and compared with a computed U: half a unit in the last place each, with room to spare. */
const ROUND_OFF = 8 * Number.EPSILON;

function verdictFor(value: number, expandedUncertainty: number, low = -Infinity, high = Infinity): ReadingVerdict {
  // A perfect meter: decimals keep their order when they become binary numbers, so here the plain comparison is exact.
  if (expandedUncertainty === 0) return value >= low && value <= high ? 'pass' : 'fail';
  const clearlyBeyond = (distance: number, limit: number): boolean =>
    distance - expandedUncertainty >
    ROUND_OFF * Math.max(Math.abs(value), Number.isFinite(limit) ? Math.abs(limit) : 0, expandedUncertainty);
  if (clearlyBeyond(value - low, low) && clearlyBeyond(high - value, high)) return 'pass';
  if (clearlyBeyond(low - value, low) || clearlyBeyond(value - high, high)) return 'fail';
  return 'inconclusive';
}

function refuseNonsense(reading: ReadingToJudge, coverageFactor: number): void {
  const { value, low, high, accuracy, resolution } = reading;
  if (low === undefined && high === undefined)
    throw new BadInputError('there is no limit to judge against: give a low limit, a high limit or both');
  const numbers = { value, 'low limit': low, 'high limit': high, resolution, 'coverage factor': coverageFactor };
  for (const [name, number] of Object.entries({ ...numbers, accuracy: accuracy.percentOfReading, digits: accuracy.digits })) {
    if (number !== undefined && !Number.isFinite(number)) throw new BadInputError(`the ${name} is no number`);
  }
  if (Math.abs(value) >= NOT_A_READING_FROM) throw new BadInputError(`${value} is no reading: meters send 9.9e37 and above for overload`);
  if (low !== undefined && high !== undefined && low > high)
    throw new BadInputError(`the low limit ${low} is above the high limit ${high}`);
  if (accuracy.percentOfReading < 0 || accuracy.digits < 0) throw new BadInputError('an accuracy cannot be negative');
  if (resolution < 0) throw new BadInputError(`the resolution ${resolution} is negative: it is the value of one digit`);
  if (coverageFactor <= 0) throw new BadInputError(`the coverage factor ${coverageFactor} is not above 0: 2 is usual`);
}
