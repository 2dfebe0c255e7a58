import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { BadInputError } from '../../../shared/errors.js';
import { parseAccuracy } from '../../../shared/measure/parse-accuracy.js';
import { parseQuantity } from '../../../shared/measure/parse-quantity.js';

describe('parseQuantity', () => {
  // Contract, section 4; the powers of ten are those of the SI brochure, table 7.
  test.each([
    ['12', 12],
    ['-5.0', -5],
    ['+0.5', 0.5],
    ['.5', 0.5],
    ['12.41k', 12410],
    ['0.47M', 470_000],
    ['3m', 0.003],
    ['1G', 1e9],
    ['31.5u', 3.15e-5],
    ['31.5\u00b5', 3.15e-5],
    ['31.5\u03bc', 3.15e-5],
    ['10n', 1e-8],
    ['4.7p', 4.7e-12],
    ['1.2e3', 1200],
    ['1E-3', 0.001],
    ['-0', -0],
  ])('When %s is typed, then it is exactly %d', (text, value) => {
    expect(parseQuantity(text)).toBe(value);
  });

  test.each([
    '',
    'twelve',
    '1e3k',
    '1,5',
    '12 k',
    ' 12',
    '12 ',
    '12K',
    '12kk',
    '12ohm',
    '1.2.3',
    '0x10',
    '--5',
    'k',
    '1e400',
    'Infinity',
    'NaN',
    '1e',
    '٣',
  ])("When '%s' is typed, then it is refused as bad input", (text) => {
    expect(() => parseQuantity(text)).toThrow(BadInputError);
  });

  test('When a comma stands for the decimal point, then the message says what to write', () => {
    expect(() => parseQuantity('1,5')).toThrow(/behind a point, not a comma/);
  });

  test('When any finite number is printed and read back, then it is the same number', () => {
    fc.assert(
      fc.property(fc.double({ noNaN: true, noDefaultInfinity: true }), (value) =>
        Object.is(parseQuantity(Object.is(value, -0) ? '-0' : String(value)), value),
      ),
    );
  });
});

describe('parseAccuracy', () => {
  test.each([
    ['0.8%+3', 0.8, 3],
    ['±1% + 5 dgt', 1, 5],
    ['± 0.5 % + 2dgt', 0.5, 2],
    ['0%+0', 0, 0],
    ['0.0020%+0', 0.002, 0],
  ])('When %s is given, then it is %d percent of reading and %d digits (contract, section 4)', (text, percentOfReading, digits) => {
    expect(parseAccuracy(text)).toEqual({ percentOfReading, digits });
  });

  test.each(['', '1%', '3', '1+3', '-1%+2', '1%+-2', '1%-2', '+-1%+2', '1,5%+3', '1%+3 counts', '%+'])(
    "When '%s' is given, then it is refused as bad input",
    (text) => {
      expect(() => parseAccuracy(text)).toThrow(BadInputError);
    },
  );
});
