/** From this magnitude on a SCPI number is never a reading (SCPI-99, volume 1: ±9.9E37 is infinity). */
export const NOT_A_READING_FROM = 9.9e37;
/** SCPI-99's "not a number". */
const SCPI_NOT_A_NUMBER = 9.91e37;
/** Meters print 9.91E37 with four digits at least; neighbours such as 9.9E37 are 0.1 % away. */
const NOT_A_NUMBER_TOLERANCE = 1e-5;

/** What a meter's answer turned out to be. Only `value` is a reading. */
export type ScpiNumber =
  { kind: 'value'; value: number } | { kind: 'overload'; sign: 1 | -1 } | { kind: 'not-a-number' } | { kind: 'garbage'; text: string };

/** NR1 (integer), NR2 (with a point) and NR3 (with an exponent) of IEEE 488.2, 8.7. */
const NUMERIC_RESPONSE = /^[+-]?(?:\d+\.?\d*|\.\d+)(?:[eE][+-]?\d+)?$/;
/** Words that stand for overload: SCPI's own, and two found in an instrument manual instead of a number. */
const OVERLOAD_WORD = /^(?<sign>[+-])?(?<negative>N)?(?:INF|INFINITY|OVLOAD|OVFLOW)$/i;

/**
 * Reads the one number a meter answers to a query, and tells a reading from everything that only looks like one.
 *
 * Numbers are compared as numbers, never as text: `9.90000E+37`, `+9.9e37` and `99E36` are the same overload. Blanks and line
 * ends around the number are passed over. `overloadFrom` is for meters that send a smaller number of their own for overload.
 * Refuses nothing: what can't be read comes back as `garbage`, a list of numbers included.
 * Source: SCPI-99 volume 1; IEEE 488.2; contract, section 6.
 *
 * @example parseScpiNumber('+1.23456E-03') // { kind: 'value', value: 0.00123456 }
 * @example parseScpiNumber('-9.9E+37') // { kind: 'overload', sign: -1 }
 */
export function parseScpiNumber(text: string, options: { overloadFrom?: number | undefined } = {}): ScpiNumber {
  const answer = text.trim();
  if (/^nan$/i.test(answer)) return { kind: 'not-a-number' };
  const word = OVERLOAD_WORD.exec(answer);
  if (word) return { kind: 'overload', sign: word.groups?.['sign'] === '-' || word.groups?.['negative'] !== undefined ? -1 : 1 };
  if (!NUMERIC_RESPONSE.test(answer)) return { kind: 'garbage', text: answer };
  const value = Number(answer);
  const magnitude = Math.abs(value);
  if (Math.abs(magnitude / SCPI_NOT_A_NUMBER - 1) < NOT_A_NUMBER_TOLERANCE) return { kind: 'not-a-number' };
  if (magnitude >= Math.min(NOT_A_READING_FROM, options.overloadFrom ?? Infinity)) return { kind: 'overload', sign: value < 0 ? -1 : 1 };
  return { kind: 'value', value };
}
