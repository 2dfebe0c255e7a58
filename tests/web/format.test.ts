import { expect, test } from 'vitest';
import { oneIn } from '../../web/features/captures/components/capture-words.js';
import { formatAge, formatMoney, parseMoney, unitNumber } from '../../web/lib/format.js';
import { safeBack } from '../../web/paths.js';

test('When an amount is typed, then it is whole minor units, and nonsense is no number', () => {
  // ISO 4217: GBP has two digits after the point, JPY none.
  expect(parseMoney('12.50', 'GBP')).toBe(1250);
  expect(parseMoney('12.5', 'GBP')).toBe(1250);
  expect(parseMoney('12', 'GBP')).toBe(1200);
  expect(parseMoney('0.07', 'GBP')).toBe(7);
  expect(parseMoney('300', 'JPY')).toBe(300);
  for (const nonsense of ['', '12,50', '12.505', '-3', '1e3', '300.5 '])
    expect(parseMoney(nonsense, nonsense.startsWith('300') ? 'JPY' : 'GBP')).toBeNaN();
  expect(formatMoney(2760, 'GBP')).toBe('£27.60');
});

test('When a unit number is short, then it is shown with four digits', () => {
  expect([unitNumber(7), unitNumber(412), unitNumber(12345)]).toEqual(['0007', '0412', '12345']);
});

test('When time has passed, then it is told in the coarsest whole unit', () => {
  const now = Date.parse('2026-03-05T12:00:00Z');
  expect(
    ['2026-03-05T11:53:10Z', '2026-03-05T09:00:00Z', '2026-03-04T11:00:00Z', '2026-03-03T11:00:00Z', '2026-03-05T12:00:05Z'].map((iso) =>
      formatAge(iso, now),
    ),
  ).toEqual(['6 min', '3 h', '1 day', '2 days', '0 min']);
});

test('When a confidence is said in words, then the odds of being wrong have one figure', () => {
  // 1/(1 − 0.9986) = 714, 1/(1 − 0.9999) = 10 000, 1/(1 − 0.999) = 1 000.
  expect([0.9986, 0.9999, 0.999, 0.5].map(oneIn)).toEqual(['1 in 700', '1 in 10 000', '1 in 1 000', '1 in 2']);
});

test('When the place to go back to is another site, then it is the list of units', () => {
  expect(safeBack('/units/0412?do=repair')).toBe('/units/0412?do=repair');
  for (const elsewhere of [null, '', 'https://elsewhere.example', '//elsewhere.example', '/\\elsewhere.example', 'javascript:alert(1)'])
    expect(safeBack(elsewhere)).toBe('/units');
});
