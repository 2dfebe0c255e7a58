import { describe, expect, test } from 'vitest';
import type { Bins } from '../../../shared/decode/bin-levels.js';
import type { LevelFit } from '../../../shared/decode/fit-levels.js';
import { fitLevels } from '../../../shared/decode/fit-levels.js';
import { likeliestStates, litEvidence } from '../../../shared/decode/lamp-states.js';
import { solveSymmetric } from '../../../shared/decode/solve-symmetric.js';
import { normalFrom, seededRandom } from '../../../shared/lamps/seeded-random.js';

function evenBins(count: number): Bins {
  const startsS = Float64Array.from({ length: count }, (_, bin) => bin * 0.02);
  return {
    startsS,
    endsS: startsS.map((startS) => startS + 0.02),
    weights: new Float64Array(count).fill(1),
    levels: [],
    exact: false,
    durationS: count * 0.02,
  };
}

function flatFit(count: number, dark: number, amplitude: number, noise: number): LevelFit {
  const flat = (value: number): Float64Array => new Float64Array(count).fill(value);
  return { dark: flat(dark), amplitude: flat(amplitude), glow: flat(0), glowShares: [], noise };
}

describe('evidence of one bin', () => {
  // Equal priors, threshold halfway: P(error) = Q(d'/2). Published check values, topic 9 (computed from Abramowitz and Stegun, table 26.1):
  // d' = 1: 0.308538, d' = 2: 0.158655, d' = 3: 0.0668072.
  test.each([
    [1, 0.308538],
    [2, 0.158655],
    [3, 0.0668072],
  ])("When lit and dark are d' = %i apart, then a bin is misread with probability Q(d'/2)", (separation, published) => {
    const count = 40_000;
    const random = seededRandom(separation);
    const lane = Float64Array.from({ length: count }, () => 100 + normalFrom(random) * 10);
    const evidence = litEvidence(evenBins(count), lane, flatFit(count, 100, 10 * separation, 10));
    const misread = evidence.filter((nats) => nats > 0).length / count;
    // Three standard errors of a share of 40 000.
    expect(Math.abs(misread - published)).toBeLessThan(3 * Math.sqrt((published * (1 - published)) / count));
  });

  test('When a level stands halfway, then it says nothing', () => {
    expect([...litEvidence(evenBins(1), Float64Array.of(150), flatFit(1, 100, 100, 10))]).toEqual([0]);
  });

  test('When a level is far out, then one bin never decides alone', () => {
    expect([...litEvidence(evenBins(1), Float64Array.of(1e6), flatFit(1, 100, 100, 1))]).toEqual([6]);
  });

  test('When a bin is a hole, then it says nothing', () => {
    const bins = { ...evenBins(1), weights: Float64Array.of(0) };
    expect([...litEvidence(bins, Float64Array.of(200), flatFit(1, 100, 100, 10))]).toEqual([0]);
  });
});

describe('the likeliest course of a lamp', () => {
  test('When two bins dip in a lit second, then the lamp stays lit', () => {
    const evidence = Float64Array.from({ length: 50 }, (_, bin) => (bin === 20 || bin === 21 ? -6 : 6));
    expect(likeliestStates(evidence).every((state) => state === 1)).toBe(true);
  });

  test('When it is dark for a quarter of a second, then that is seen to the bin', () => {
    const evidence = Float64Array.from({ length: 50 }, (_, bin) => (bin >= 20 && bin < 33 ? -6 : 6));
    expect([...likeliestStates(evidence)]).toEqual([...evidence].map((nats) => (nats > 0 ? 1 : 0)));
  });

  test('When nothing is known, then it has states all the same', () => {
    expect([...likeliestStates(new Float64Array(3))]).toEqual([0, 0, 0]);
    expect([...likeliestStates(new Float64Array(0))]).toEqual([]);
  });
});

describe('two levels that drift', () => {
  test('When ambient light and gain rise over a minute, then both curves follow', () => {
    const count = 3000;
    const states = Int8Array.from({ length: count }, (_, bin) => (Math.floor(bin / 60) % 2) as 0 | 1);
    const lane = Float64Array.from({ length: count }, (_, bin) => 50 + 0.03 * bin + (states[bin] === 1 ? 200 + 0.02 * bin : 0));
    const fit = fitLevels(evenBins(count), lane, states, [], { fullScale: 1023, noise: 3, amplitude: 200 });
    // Computed from the two lines that made the lane.
    for (const bin of [100, 1500, 2900]) {
      expect(Math.abs((fit.dark[bin] ?? 0) - (50 + 0.03 * bin))).toBeLessThan(1);
      expect(Math.abs((fit.amplitude[bin] ?? 0) - (200 + 0.02 * bin))).toBeLessThan(1.5);
    }
  });

  test("When a neighbour's light is in the lane, then its share is found", () => {
    const count = 3000;
    const states = Int8Array.from({ length: count }, (_, bin) => (Math.floor(bin / 60) % 2) as 0 | 1);
    const glow = Float64Array.from({ length: count }, (_, bin) => (Math.floor(bin / 37) % 2 === 1 ? 700 : 0));
    const lane = Float64Array.from({ length: count }, (_, bin) => 60 + (states[bin] === 1 ? 200 : 0) + 0.08 * (glow[bin] ?? 0));
    const fit = fitLevels(evenBins(count), lane, states, [glow], { fullScale: 1023, noise: 3, amplitude: 200 });
    expect(fit.glowShares[0]).toBeCloseTo(0.08, 2);
  });
});

describe('a small system of equations', () => {
  test('When the matrix is positive definite, then x solves it', () => {
    // Computed: 4x + 2y = 8, 2x + 3y = 7.
    expect([...solveSymmetric(Float64Array.of(4, 2, 2, 3), Float64Array.of(8, 7))].map((x) => Math.round(x * 1e9) / 1e9)).toEqual([
      1.25, 1.5,
    ]);
  });

  test('When an unknown has no equation, then it is held at zero', () => {
    const [known, unknown] = solveSymmetric(Float64Array.of(2, 0, 0, 0), Float64Array.of(4, 1));
    expect(known).toBeCloseTo(2, 9);
    expect(unknown).toBe(0);
  });
});
