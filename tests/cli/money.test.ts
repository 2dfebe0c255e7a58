import { expect, test } from 'vitest';
import { UsageError } from '../../cli/errors.js';
import { moneyText, parseMoney } from '../../cli/money.js';
import { parsePartSource } from '../../cli/part-source.js';
import { unitNumber } from '../../cli/tree/parts.js';

// Decimals of a currency: ISO 4217 (GBP and EUR have 2, JPY none, BHD 3).
test.each([
  ['6.00', 'GBP', 600],
  ['0.29', 'GBP', 29],
  ['12', 'GBP', 1200],
  ['12.5', 'EUR', 1250],
  ['12', 'JPY', 12],
  ['1.234', 'BHD', 1234],
])('When %s %s is typed, then it is %i minor units', (text, currency, minor) => {
  expect(parseMoney(text, currency, '--cost')).toBe(minor);
});

test.each([['6,00'], ['-1'], ['1e3'], ['£6'], ['6.001'], ['']])(
  "When '%s' is typed as money, then it is refused and the option is named",
  (text) => {
    expect(() => parseMoney(text, 'GBP', '--cost')).toThrow(/--cost/);
  },
);

test('When money is shown, then it has the sign and the decimals of its currency', () => {
  expect(moneyText(600, 'GBP')).toBe('£6.00');
  expect(moneyText(2450, 'EUR')).toBe('€24.50');
});

test('When a part came from a unit, then the number may have its noughts', () => {
  expect(parsePartSource('used:0388')).toEqual({ kind: 'used', fromUnit: 388 });
  expect(parsePartSource('New')).toEqual({ kind: 'new' });
  expect(() => parsePartSource('used')).toThrow(UsageError);
  expect(() => parsePartSource('used:0')).toThrow(UsageError);
});

test('When a unit number is typed in any of its forms, then it is the same unit', () => {
  expect(['412', '0412', 'No. 0412', 'no.412'].map(unitNumber)).toEqual([412, 412, 412, 412]);
  expect(() => unitNumber('0')).toThrow();
  expect(() => unitNumber('41a')).toThrow();
});
