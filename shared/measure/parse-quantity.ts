import { BadInputError } from '../errors.js';

/** SI prefixes a quantity may carry, as powers of ten (SI brochure, table 7). Both code points of the micro sign are in use: U+00B5 and U+03BC. */
const PREFIX_EXPONENTS: Readonly<Record<string, number>> = { p: -12, n: -9, u: -6, '\u00b5': -6, '\u03bc': -6, m: -3, k: 3, M: 6, G: 9 };

const QUANTITY = /^(?<decimal>[+-]?(?:\d+\.?\d*|\.\d+))(?:(?<prefix>[pnu\u00b5\u03bcmkMG])|[eE](?<exponent>[+-]?\d+))?$/u;

/**
 * Reads a number the way a technician types it: a plain decimal, then either one SI prefix or an exponent.
 *
 * The prefix shifts the decimal before it becomes a binary number, so `31.5u` is the same number as `3.15e-5`.
 * Case matters: `m` is milli, `M` is mega.
 *
 * Refuses (BadInputError): blanks, a decimal comma, unit letters, a prefix together with an exponent, and what is too large for a number.
 * Source: contract, section 4.
 *
 * @example parseQuantity('12.41k') // 12410
 * @example parseQuantity('1.2e3') // 1200
 */
export function parseQuantity(text: string): number {
  const parts = QUANTITY.exec(text)?.groups;
  if (parts?.['decimal'] === undefined) throw new BadInputError(`'${text}' is no number: ${reasonFor(text)}`);
  const exponent = parts['prefix'] === undefined ? (parts['exponent'] ?? '0') : String(PREFIX_EXPONENTS[parts['prefix']]);
  const value = Number(`${parts['decimal']}e${exponent}`);
  if (!Number.isFinite(value)) throw new BadInputError(`'${text}' is larger than any reading can be`);
  return value;
}

function reasonFor(text: string): string {
  if (/^[+-]?\d+,\d/.test(text)) return 'write the decimals behind a point, not a comma';
  if (/\s/.test(text)) return 'write it without blanks';
  if (/\d[eE][+-]?\d+./.test(text)) return 'give an exponent or a prefix, not both';
  return 'write a decimal such as 12.41, with at most one prefix of p n u m k M G, or with an exponent such as 1.2e3';
}
