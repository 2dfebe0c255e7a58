import { BadInputError } from '../errors.js';

/** The units a check may have, each as a power of ten of what instruments answer in (SCPI: ohm, volt, ampere, farad, degree Celsius). */
const BASE_UNITS: Readonly<Record<string, { base: string; exponent: number }>> = {
  ohm: { base: 'ohm', exponent: 0 },
  kohm: { base: 'ohm', exponent: 3 },
  Mohm: { base: 'ohm', exponent: 6 },
  V: { base: 'V', exponent: 0 },
  mA: { base: 'A', exponent: -3 },
  A: { base: 'A', exponent: 0 },
  uF: { base: 'F', exponent: -6 },
  F: { base: 'F', exponent: 0 },
  degC: { base: 'degC', exponent: 0 },
};

/**
 * The base unit of a unit: what a SCPI instrument answers in.
 *
 * Refuses (BadInputError) a unit that no check may have.
 *
 * @example baseUnitOf('Mohm') // 'ohm'
 */
export function baseUnitOf(unit: string): string {
  return entryOf(unit).base;
}

/**
 * A value in another unit of the same kind, for example an instrument's ohms as a sheet's megohms.
 *
 * The point is shifted in the decimal, so a reading of up to 15 digits is exact in either unit. Refuses (BadInputError) units of different kinds.
 *
 * @example convertUnit(2310000, 'ohm', 'Mohm') // 2.31
 */
export function convertUnit(value: number, from: string, to: string): number {
  const source = entryOf(from);
  const target = entryOf(to);
  if (source.base !== target.base) throw new BadInputError(`${from} cannot be turned into ${to}`);
  const [mantissa = '0', exponent = '0'] = String(value).split('e');
  return Number(`${mantissa}e${Number(exponent) + source.exponent - target.exponent}`);
}

function entryOf(unit: string): { base: string; exponent: number } {
  const entry = BASE_UNITS[unit];
  if (entry === undefined) throw new BadInputError(`the unit '${unit}' is not known: use one of ${Object.keys(BASE_UNITS).join(', ')}`);
  return entry;
}
