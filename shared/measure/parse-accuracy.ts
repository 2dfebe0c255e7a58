import { z } from 'zod';
import { BadInputError } from '../errors.js';

/** A meter's accuracy as its data sheet prints it: plus or minus (percent of the reading, and a number of digits of its last place). */
export const accuracySchema = z.strictObject({ percentOfReading: z.number().nonnegative(), digits: z.number().nonnegative() });
export type Accuracy = z.infer<typeof accuracySchema>;

const DECIMAL = String.raw`\d+\.?\d*|\.\d+`;
const ACCURACY = new RegExp(String.raw`^\s*(?:±\s*)?(?<percent>${DECIMAL})\s*%\s*\+\s*(?<digits>${DECIMAL})\s*(?:dgt)?\s*$`, 'u');

/**
 * Reads an accuracy as a multimeter's data sheet prints it: `A%+D`.
 *
 * Blanks, a leading `±` and `dgt` behind the digits are accepted.
 * Refuses (BadInputError): anything else, negative figures included. Source: contract, section 4.
 *
 * @example parseAccuracy('0.8%+3') // { percentOfReading: 0.8, digits: 3 }
 * @example parseAccuracy('±1% + 5 dgt') // { percentOfReading: 1, digits: 5 }
 */
export function parseAccuracy(text: string): Accuracy {
  const parts = ACCURACY.exec(text)?.groups;
  const percentOfReading = Number(parts?.['percent']);
  const digits = Number(parts?.['digits']);
  if (!Number.isFinite(percentOfReading) || !Number.isFinite(digits)) {
    throw new BadInputError(`'${text}' is no accuracy: write percent of reading and digits as the data sheet has them, for example 0.8%+3`);
  }
  return { percentOfReading, digits };
}
