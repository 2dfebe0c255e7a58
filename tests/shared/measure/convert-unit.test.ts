import fc from 'fast-check';
import { expect, test } from 'vitest';
import { BadInputError } from '../../../shared/errors.js';
import { baseUnitOf, convertUnit } from '../../../shared/measure/convert-unit.js';

// Powers of ten of the SI prefixes: SI brochure, table 7.
test.each([
  [2_310_000, 'ohm', 'Mohm', 2.31],
  [0.00344, 'A', 'mA', 3.44],
  [3.01e-5, 'F', 'uF', 30.1],
  [96.4, 'ohm', 'ohm', 96.4],
  [-5, 'V', 'V', -5],
  [0.01, 'Mohm', 'ohm', 10_000],
])('When %d %s is wanted in %s, then it is exactly %d', (value, from, to, converted) => {
  expect(convertUnit(value, from, to)).toBe(converted);
});

test('When the units are of different kinds or unknown, then it is refused', () => {
  expect(() => convertUnit(1, 'V', 'ohm')).toThrow(BadInputError);
  expect(() => convertUnit(1, 'furlong', 'ohm')).toThrow(/furlong/);
});

test('When a reading of up to 15 digits goes there and back, then it is the same number', () => {
  // Any decimal of 15 digits survives a double and back (IEEE 754, binary64); longer ones need not.
  fc.assert(
    fc.property(fc.integer({ min: -(10 ** 15) + 1, max: 10 ** 15 - 1 }), fc.integer({ min: -20, max: 20 }), (digits, exponent) => {
      const value = Number(`${digits}e${exponent}`);
      return convertUnit(convertUnit(value, 'ohm', 'Mohm'), 'Mohm', 'ohm') === value;
    }),
  );
});

test('When a unit is asked for its base, then it is what instruments answer in', () => {
  expect(['Mohm', 'mA', 'uF', 'degC'].map(baseUnitOf)).toEqual(['ohm', 'A', 'F', 'degC']);
});
