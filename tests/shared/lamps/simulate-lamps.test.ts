import { describe, expect, test } from 'vitest';
import { codeStates, lampsOfDigit, readyBlinkStates } from '../../../shared/lamps/panel-states.js';
import { normalFrom, seededRandom } from '../../../shared/lamps/seeded-random.js';
import { simulateLamps, type SimulatedLight } from '../../../shared/lamps/simulate-lamps.js';
import { heronCoding } from '../../helpers/fixtures.js';

const light: SimulatedLight = {
  lamps: ['fill', 'wash'],
  sampleRateHz: 100,
  scaleMax: 1000,
  jitter: 0,
  amplitude: { fill: 0.5 },
  ambient: { fill: 0.1 },
};
const samplesOf = (change: Partial<SimulatedLight>, seed = 1) =>
  [...simulateLamps([{ seconds: 1, lit: ['fill'] }, { seconds: 1, lit: [] }], { ...light, ...change }, seededRandom(seed))]; // prettier-ignore

describe('a simulated panel', () => {
  test('When a lamp is lit for a second, then it rises to its level and falls back', () => {
    const samples = samplesOf({});
    expect(samples).toHaveLength(200);
    expect(samples[50]).toEqual({ timeUs: 500_000, levels: [600, 50] });
    expect(samples[199]?.levels).toEqual([100, 50]);
    // Computed: one time constant of 10 ms after the change, 1 - 1/e of the way down.
    expect(samples[100]?.levels[0]).toBe(Math.round(1000 * (0.1 + 0.5 * Math.exp(-1))));
  });

  test('When the seed is the same, then so is every sample; with another it differs', () => {
    expect(samplesOf({ noise: 0.02, jitter: 0.2 })).toEqual(samplesOf({ noise: 0.02, jitter: 0.2 }));
    expect(samplesOf({ noise: 0.02 }, 1)).not.toEqual(samplesOf({ noise: 0.02 }, 2));
  });

  test('When samples are lost and missing, then times never fall', () => {
    const samples = samplesOf({ jitter: 0.3, loss: 0.1, holes: [{ fromS: 0.5, toS: 0.8 }] });
    expect(samples.length).toBeLessThan(180);
    expect(samples.some(({ timeUs }) => timeUs > 510_000 && timeUs < 790_000)).toBe(false);
    samples.slice(1).forEach(({ timeUs }, index) => expect(timeUs).toBeGreaterThanOrEqual(samples[index]?.timeUs ?? 0));
  });

  test('When a lamp is burnt out, then only its neighbour sees light, and glows into it', () => {
    const samples = samplesOf({ burntOut: ['wash'], glow: 0.1 });
    expect(samples[50]?.levels).toEqual([600, 100]);
  });

  test('When levels leave the scale, then they are held at its ends', () => {
    const levels = samplesOf({ noise: 1 }).flatMap((sample) => sample.levels);
    expect(Math.min(...levels)).toBe(0);
    expect(Math.max(...levels)).toBe(1000);
  });
});

describe('states of a panel', () => {
  // Common practice, no published source: 4 and 1 with the selector is 5.
  test('When a code is planned, then its digits take turns, the selector with the first', () => {
    expect(codeStates(heronCoding, 5, 3, [1.2, 1.1])).toEqual([
      { seconds: 1.2, lit: ['spin', 'rinse', 'fill'] },
      { seconds: 1.1, lit: ['wash', 'fill'] },
    ]);
  });

  test('When a digit can be shown by no lamps, then it is refused', () => {
    expect(lampsOfDigit(heronCoding, 15)).toEqual(['drain', 'rinse', 'wash', 'fill']);
    expect(() => lampsOfDigit(heronCoding, 16)).toThrow(RangeError);
  });

  test('When the ready blink is planned, then it begins lit and ends dark', () => {
    expect(readyBlinkStates(['fill'], 2, 0.9, ['lock'])).toEqual([
      { seconds: 0.45, lit: ['fill', 'lock'] },
      { seconds: 0.45, lit: ['lock'] },
      { seconds: 0.45, lit: ['fill', 'lock'] },
      { seconds: 0.45, lit: ['lock'] },
    ]);
  });
});

describe('seeded numbers', () => {
  test('When many are drawn, then they fill 0 to below 1 evenly, and normal ones have the right spread', () => {
    const random = seededRandom(42);
    const uniform = Array.from({ length: 20_000 }, random);
    expect(Math.min(...uniform)).toBeGreaterThanOrEqual(0);
    expect(Math.max(...uniform)).toBeLessThan(1);
    expect(uniform.reduce((sum, value) => sum + value, 0) / uniform.length).toBeCloseTo(0.5, 2);
    const normal = Array.from({ length: 20_000 }, () => normalFrom(random));
    const mean = normal.reduce((sum, value) => sum + value, 0) / normal.length;
    expect(mean).toBeCloseTo(0, 1);
    expect(Math.sqrt(normal.reduce((sum, value) => sum + (value - mean) ** 2, 0) / normal.length)).toBeCloseTo(1, 1);
  });
});
