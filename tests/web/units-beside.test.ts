import { expect, test } from 'vitest';
import { leftOutWords, MOST_BESIDE, unitsBeside } from '../../web/features/tags/units-beside.js';

test('When units are typed, then each counts once, however they are parted, and the one that is printed anyway does not', () => {
  expect(unitsBeside('0413, 0414 0413;412', 412)).toEqual({ numbers: [413, 414], tooMany: [] });
  expect(unitsBeside('none 0', 412)).toEqual({ numbers: [], tooMany: [] });
});

test('When more units are typed than are printed at once, then those above the limit are named', () => {
  const typed = Array.from({ length: MOST_BESIDE + 2 }, (_, index) => 1000 + index);
  const { numbers, tooMany } = unitsBeside(typed.join(' '), 412);
  expect(numbers).toHaveLength(MOST_BESIDE);
  expect(tooMany).toEqual([1040, 1041]);
  expect(leftOutWords({ tooMany, without: [], unfetched: [] })).toBe(
    'At most 40 more at once, so left out: No. 1040, No. 1041. Print them in another go.',
  );
});

test('When units have no tag, or could not be fetched, then each is named with its reason; nothing is said where none is left out', () => {
  expect(leftOutWords({ tooMany: [], without: [413], unfetched: [414, 415], why: 'The server does not answer.' })).toBe(
    'No standing tag, so left out: No. 0413. Could not be fetched, so left out: No. 0414, No. 0415. The server does not answer.',
  );
  expect(leftOutWords({ tooMany: [], without: [], unfetched: [] })).toBeUndefined();
});
