import { expect, test } from 'vitest';
import { holesOf } from '../../../shared/lamps/holes.js';

const header = {
  format: 'refettle.lamps',
  version: 1,
  capturedAt: '2026-03-03T09:00:00Z',
  source: 'probe',
  lamps: ['fill'],
  scale: { unit: 'counts', max: 1 },
} as const;
const of = (timesUs: number[], endUs?: number, source: 'probe' | 'keys' = 'probe') =>
  holesOf({ header: { ...header, source, lamps: ['fill'] }, timesUs, ...(endUs === undefined ? {} : { endUs }) });

// Edges are told within 0.5 s (contract, section 3): a shorter pause is no hole.
test('When samples are missing for more than half a second, then that is a hole, at the start, between and at the end', () => {
  expect(of([600_000, 1_000_000, 1_500_000, 4_000_000], 5_000_000)).toEqual([
    { fromS: 0, toS: 0.6 },
    { fromS: 1.5, toS: 4 },
    { fromS: 4, toS: 5 },
  ]);
});

test('When the lamps were tapped with keys, then nothing is missing', () => {
  expect(of([0, 9_000_000], 20_000_000, 'keys')).toEqual([]);
});

test('When there are no samples, then all of it is one hole', () => {
  expect(of([], 2_000_000)).toEqual([{ fromS: 0, toS: 2 }]);
  expect(of([])).toEqual([]);
});
