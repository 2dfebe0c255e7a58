import { describe, expect, test } from 'vitest';
import { decimalsOf, formatLimits, formatReading, formatSpread } from '../../../shared/measure/format-reading.js';

// Readings, spreads and limits as the look's own sketches of unit page, tag and terminal show them; others are marked.
describe('formatReading', () => {
  test.each([
    [157.7, 0.1, 'ohm', '157.7 Ω'],
    [0.084, 0.001, 'ohm', '0.084 Ω'],
    [2.31, 0.01, 'Mohm', '2.31 MΩ'],
    [3.44, 0.01, 'mA', '3.44 mA'],
    // computed by hand
    [96.44, 0.1, 'ohm', '96.4 Ω'],
    [3.445, 0.01, 'mA', '3.45 mA'],
    [12414, 10, 'ohm', '12410 Ω'],
    [30.1, 0.01, 'uF', '30.10 µF'],
    [19, 1, 'degC', '19 °C'],
    [-5, 0.01, 'V', '−5.00 V'],
    [-0.001, 0.01, 'V', '0.00 V'],
    [12.5, 0.5, 'V', '12.5 V'],
    [3.01e-5, 1e-8, 'farad', '0.00003010 farad'],
    [1.25, 0, 'V', '1.25 V'],
    [41, 1, '', '41'],
  ])('When %d is shown at a resolution of %d %s, then it reads %s', (value, resolution, unit, shown) => {
    expect(formatReading(value, resolution, unit)).toBe(shown);
  });
});

describe('formatSpread', () => {
  test.each([
    [1.2568915360258155, 0.1, '', '±1.3'],
    [0.9052852220893333, 0.1, 'ohm', '±0.9 Ω'],
    [0.1371784239594551, 0.01, '', '±0.14'],
    // computed by hand: never a spread of nothing where there is one
    [0.03, 0.1, '', '±0.03'],
    [149.27, 10, 'ohm', '±150 Ω'],
    [0, 0.1, '', '±0.0'],
  ])('When U is %d at a resolution of %d, then it reads as in the sketches', (spread, resolution, unit, shown) => {
    expect(formatSpread(spread, resolution, unit)).toBe(shown);
  });
});

describe('formatLimits', () => {
  test.each([
    [undefined, 3.5, 'mA', 0.01, 'at most 3.50 mA'],
    [1, undefined, 'Mohm', 0.01, 'at least 1.00 MΩ'],
    [140, 180, 'ohm', 0.1, '140 to 180 Ω'],
    [24, 29, 'ohm', 0.1, '24.0 to 29.0 Ω'],
    [undefined, 0.2, 'ohm', 0.001, 'at most 0.200 Ω'],
    [undefined, 90, 's', 1, 'at most 90 s'],
    // computed by hand
    [undefined, 0.3, 'ohm', 0.01, 'at most 0.30 Ω'],
    [3300, 4300, 'ohm', 1, '3300 to 4300 Ω'],
    [9, 10, 'ohm', 0.01, '9.00 to 10.00 Ω'],
    [-5.25, -4.75, 'V', 0.01, '−5.25 to −4.75 V'],
    [undefined, 3.525, 'mA', 0.1, 'at most 3.525 mA'],
    [10, 10, 'V', 0.1, 'exactly 10.0 V'],
    [undefined, 3.5, 'mA', 0, 'at most 3.5 mA'],
    [undefined, undefined, 'V', 0.1, 'no limits'],
  ])('When the limits are %d and %d %s at %d, then they read %s', (low, high, unit, resolution, shown) => {
    expect(formatLimits(low, high, unit, resolution)).toBe(shown);
  });
});

describe('decimalsOf', () => {
  test.each([
    [10, 0],
    [1, 0],
    [0.5, 1],
    [0.25, 2],
    [0.001, 3],
    [1e-8, 8],
    [0, undefined],
  ])('When the resolution is %d, then %s decimals are shown', (resolution, decimals) => {
    expect(decimalsOf(resolution)).toBe(decimals);
  });
});
