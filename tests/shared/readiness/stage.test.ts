import { describe, expect, test } from 'vitest';
import { stageOf } from '../../../shared/readiness/stage.js';
import {
  capture,
  goodReading,
  intake,
  mendedAndProved,
  repair,
  returned,
  runBegan,
  runEnded,
  signOff,
  sold,
  withdrawn,
} from '../../helpers/unit-facts.js';

describe("A unit's stage is derived from what happened", () => {
  test.each([
    ['taken in', () => [intake()], 'intake'],
    ['captured for the first time', () => [intake(), capture()], 'testing'],
    ['measured for the first time', () => [intake(), goodReading('heater')], 'testing'],
    ['mended', () => [intake(), capture(), repair()], 'repair'],
    ['mended without a test before', () => [intake(), repair()], 'repair'],
    ['put to a proof run', () => [intake(), repair(), runBegan(true)], 'proving'],
    ['proved straight away, with nothing wrong', () => [intake(), capture(), runBegan(true)], 'proving'],
    ['proved and failed', () => [intake(), repair(), runBegan(true), runEnded(true, 'fail')], 'repair'],
    ['proved and left undecided', () => [intake(), repair(), runBegan(true), runEnded(true, 'inconclusive')], 'proving'],
    ['mended again after a proof', () => [intake(), repair(), runBegan(true), repair()], 'repair'],
    ['signed off', () => [...mendedAndProved(), signOff()], 'signed off'],
    ['stripped of its tag', () => [...mendedAndProved(), signOff(), withdrawn()], 'proving'],
    ['sold', () => [...mendedAndProved(), signOff(), sold()], 'sold'],
    ['brought back', () => [...mendedAndProved(), signOff(), sold(), returned()], 'returned'],
    ['tested after it came back', () => [...mendedAndProved(), signOff(), sold(), returned(), capture()], 'testing'],
  ])('When it was %s, then the stage follows', (_, events, stage) => {
    expect(stageOf(events())).toBe(stage);
  });
});
