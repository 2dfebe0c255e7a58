import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { BadInputError } from '../../../shared/errors.js';
import { conformanceProbability, standardNormal } from '../../../shared/measure/conformance-probability.js';
import { judge, judgementSchema, type ReadingToJudge } from '../../../shared/measure/judge.js';
import { readingUncertainty } from '../../../shared/measure/uncertainty.js';

describe('readingUncertainty', () => {
  // Accuracy examples printed in instrument manuals: the half-width for reading, percent, digits and resolution.
  test.each([
    ['2 V, ±(0.5 % + 3) at 1 mV: 1.987 to 2.013 V', 2, 0.5, 3, 0.001, 0.013],
    ['100.0 V, ±(1 % + 2) at 0.1 V: 98.8 to 101.2 V', 100, 1, 2, 0.1, 1.2],
    ['5.02, ±(2 % + 3) at 0.01: 0.1304', 5.02, 2, 3, 0.01, 0.1304],
    ['2.000 V, ±(0.08 % + 2) at 1 mV: 1.9964 to 2.0036 V', 2, 0.08, 2, 0.001, 0.0036],
    ['5 V on a 10 V range, 0.0020 % of reading and 0.0005 % of range: 150 µV', 5, 0.002, 1, 50e-6, 150e-6],
  ])('When the manual says %s, then the half-width is the same', (_says, value, percentOfReading, digits, resolution, halfWidth) => {
    expect(readingUncertainty(value, { percentOfReading, digits }, resolution).halfWidth).toBeCloseTo(halfWidth, 12);
  });

  test('When the half-width is known, then u is that of a rectangle and U twice that', () => {
    // JCGM 100 formula u = a/sqrt(3); a = 15 µV gives u = 8.6603 µV (computed from the formula).
    const { standard, expanded } = readingUncertainty(0.928571, { percentOfReading: 14e-4, digits: 2 }, 1e-6);
    expect(standard).toBeCloseTo(8.6603e-6, 9);
    expect(expanded).toBe(2 * standard);
  });

  test('When the reading is negative, then its size counts', () => {
    expect(readingUncertainty(-5, { percentOfReading: 1, digits: 0 }, 1).halfWidth).toBe(0.05);
  });
});

describe('standardNormal', () => {
  // Abramowitz and Stegun, Handbook of Mathematical Functions, table 26.1 (15 decimals; the last two rows have 10).
  test.each([
    [0.1, 0.539827837277029],
    [0.5, 0.691462461274013],
    [0.6, 0.725746882249927],
    [0.8, 0.788144601416604],
    [0.9, 0.815939874653241],
    [1.0, 0.841344746068543],
    [1.2, 0.884930329778292],
    [1.4, 0.919243340766229],
    [1.6, 0.945200708300442],
    [1.8, 0.964069680887074],
    [2.0, 0.977249868051821],
    [2.5, 0.993790334674224],
    [3.0, 0.99865010196837],
  ])('When x is %d, then P(x) is %d to the digits of the table', (x, probability) => {
    expect(Math.abs(standardNormal(x) - probability)).toBeLessThan(1e-14);
  });
  test.each([
    [4.0, 0.9999683288],
    [5.0, 0.9999997133],
  ])('When x is %d, then P(x) is %d to ten decimals', (x, probability) => {
    expect(Math.abs(standardNormal(x) - probability)).toBeLessThan(5.1e-11);
  });
});

describe('conformanceProbability', () => {
  test.each([
    // JCGM 106:2012, 7.4: y = 13.6, u = 1.8, limits 12.5 and 16.3; 0.6626297865 is R's pnorm(1.5) - pnorm(-1.1/1.8).
    ['two limits, JCGM 106 7.4', { value: 13.6, standardUncertainty: 1.8, low: 12.5, high: 16.3 }, 0.6626297865, 1e-9],
    // z = 1.40 and 1.70: Abramowitz and Stegun table 26.1 (the second computed from the formula).
    ['one upper limit, z = 1.40', { value: -5.47, standardUncertainty: 0.05, high: -5.4 }, 0.919243340766229, 1e-9],
    ['one lower limit, z = 1.70', { value: 507, standardUncertainty: 10, low: 490 }, 0.9554345, 1e-7],
    // An open uncertainty calculator's own test: 1 - p is 0.01242, 0.10574, 0.99379.
    ['10 within 9 to 11', { value: 10, standardUncertainty: 0.4, low: 9, high: 11 }, 1 - 0.01242, 1e-5],
    ['10.5 within 9 to 11', { value: 10.5, standardUncertainty: 0.4, low: 9, high: 11 }, 1 - 0.10574, 1e-5],
    ['12 outside 9 to 11', { value: 12, standardUncertainty: 0.4, low: 9, high: 11 }, 1 - 0.99379, 1e-5],
    // The same case from the formula, to all digits.
    ['12 outside 9 to 11, exactly', { value: 12, standardUncertainty: 0.4, low: 9, high: 11 }, 1 - 0.99379033, 1e-8],
  ])('When it is %s, then the probability is the published one', (_says, reading, probability, tolerance) => {
    expect(Math.abs(conformanceProbability(reading) - probability)).toBeLessThan(tolerance);
  });

  test('When a reading stands at the guarded limit, then the risk is that of the guard band', () => {
    // ILAC-G8:2009 w = U: below 2.5 %; the number is Phi(-2), computed from the formula.
    expect(1 - conformanceProbability({ value: 8, standardUncertainty: 1, high: 10 })).toBeCloseTo(0.0227501, 7);
  });

  test('When there is no uncertainty, then it is 1 on and inside a limit and 0 outside', () => {
    const at = (value: number): number => conformanceProbability({ value, standardUncertainty: 0, low: 9, high: 10 });
    expect([at(9), at(9.5), at(10), at(10.01)]).toEqual([1, 1, 1, 0]);
  });
});

const perfect = { percentOfReading: 0, digits: 0 };

describe('judge', () => {
  // ILAC-G8:09/2019, 4.2.3: pass below TL - w, conditional between TL - w and TL + w, fail above; here w = U.
  // K = sqrt(3) makes U the half-width itself, so that the boundaries can be hit.
  const limit = { unit: 'mm', high: 10, accuracy: { percentOfReading: 0, digits: 1 }, resolution: 2, coverageFactor: Math.sqrt(3) };
  test.each([
    [7.99, 'pass'],
    [8, 'inconclusive'],
    [8.01, 'inconclusive'],
    [10, 'inconclusive'],
    [11.99, 'inconclusive'],
    [12, 'inconclusive'],
    [12.01, 'fail'],
  ])('When the limit is 10 and U is 2, then %d comes to %s', (value, verdict) => {
    expect(judge({ ...limit, value }).verdict).toBe(verdict);
  });

  test('When a deviation lies in the guard band of a two-sided limit, then it is conditional as in the worked example', () => {
    // A laboratory's worked example of the rule: ±0.0030 mm, U = 0.0010 mm; 0.0017 passes, 0.0025 is in the conditional zone.
    const micrometer = {
      unit: 'mm',
      low: -0.003,
      high: 0.003,
      accuracy: { percentOfReading: 0, digits: 1 },
      resolution: 0.001,
      coverageFactor: Math.sqrt(3),
    };
    expect([0.0017, 0.0025].map((value) => judge({ ...micrometer, value }).verdict)).toEqual(['pass', 'inconclusive']);
  });

  test('When a reading is 3.20 with u = 0.800 against 4.00, then the guard band of U makes it conditional', () => {
    // A laboratory's page on ILAC-G8: T = 4.00, u = 0.800, U = 1.600, so A = 2.40.
    const accuracy = { percentOfReading: 0, digits: 0.8 * Math.sqrt(3) };
    const judged = judge({ value: 3.2, unit: 'V', high: 4, accuracy, resolution: 1 });
    expect(judged.expandedUncertainty).toBeCloseTo(1.6, 12);
    expect(judged.verdict).toBe('inconclusive');
  });

  test('When the distance is U but for round-off, then it is on the boundary and inconclusive', () => {
    // 3.5 - 3.36 is 0.14000000000000012 in binary arithmetic.
    const judged = judge({
      value: 3.36,
      unit: 'mA',
      high: 3.5,
      accuracy: { percentOfReading: 0, digits: 14 },
      resolution: 0.01,
      coverageFactor: Math.sqrt(3),
    });
    expect(judged.expandedUncertainty).toBeCloseTo(0.14, 12);
    expect(judged.verdict).toBe('inconclusive');
  });

  test('When the meter is perfect and the value is one bit above the limit, then it fails', () => {
    expect(judge({ value: 0.30000000000000004, unit: 'ohm', high: 0.3, accuracy: perfect, resolution: 0.01 }).verdict).toBe('fail');
  });

  test('When low equals high and the meter is perfect, then only that value passes', () => {
    const at = (value: number) => judge({ value, unit: 'V', low: 10, high: 10, accuracy: perfect, resolution: 0.01 }).verdict;
    expect([at(9.99), at(10), at(10.01)]).toEqual(['fail', 'pass', 'fail']);
  });

  test('When a limit is not given, then the answer has no such member', () => {
    const judged = judge({ value: 1, unit: 'V', high: 2, accuracy: perfect, resolution: 0.01 });
    expect(Object.keys(judged)).not.toContain('low');
    expect(judgementSchema.parse(judged)).toEqual(judged);
  });

  const sound: ReadingToJudge = { value: 1, unit: 'V', low: 0, high: 2, accuracy: { percentOfReading: 1, digits: 1 }, resolution: 0.01 };
  test.each([
    ['no limit', { low: undefined, high: undefined }],
    ['low above high', { low: 3 }],
    ['a negative percentage', { accuracy: { percentOfReading: -1, digits: 1 } }],
    ['negative digits', { accuracy: { percentOfReading: 1, digits: -1 } }],
    ['a negative resolution', { resolution: -0.01 }],
    ['a coverage factor of 0', { coverageFactor: 0 }],
    ['a negative coverage factor', { coverageFactor: -2 }],
    ['an overload', { value: 9.9e37 }],
    ['a negative overload', { value: -9.9e37 }],
    ['a value that is no number', { value: NaN }],
    ['an endless limit', { high: Infinity }],
    ['an uncertainty beyond all numbers', { resolution: 1e308, accuracy: { percentOfReading: 0, digits: 99 } }],
  ])('When it is handed %s, then it refuses', (_says, part) => {
    expect(() => judge({ ...sound, ...part })).toThrow(BadInputError);
  });

  test('When anything is judged, then the verdict agrees with the distance to the limits and the input stays as it was', () => {
    const number = fc.double({ min: -1e6, max: 1e6, noNaN: true });
    fc.assert(
      fc.property(number, number, number, fc.double({ min: 0.001, max: 10, noNaN: true }), (value, one, other, percentOfReading) => {
        const [low, high] = [Math.min(one, other), Math.max(one, other)];
        const reading = Object.freeze({
          value,
          unit: 'V',
          low,
          high,
          accuracy: Object.freeze({ percentOfReading, digits: 1 }),
          resolution: 0.001,
        });
        const { verdict, expandedUncertainty: spread, conformanceProbability: probability } = judge(reading);
        if (verdict === 'pass') return value - low > spread && high - value > spread && probability > 0.95;
        if (verdict === 'fail') return (low - value > spread || value - high > spread) && probability < 0.025;
        return value - low <= spread * 1.000001 + 1e-6 || high - value <= spread * 1.000001 + 1e-6;
      }),
    );
  });
});
