import { describe, expect, test } from 'vitest';
import { decodeCapture } from '../../../shared/decode/decode-capture.js';
import { seededRandom } from '../../../shared/lamps/seeded-random.js';
import { heron } from '../../helpers/fixtures.js';
import { simulateCapture, type CapturePlan } from '../../helpers/simulate-captures.js';

const LAMPS = heron.lamps.map((lamp) => lamp.id);
const between = (random: () => number, least: number, most: number): number => least + (most - least) * random();
const oneOf = (random: () => number, least: number, most: number): number => Math.floor(between(random, least, most + 1));

interface Range {
  noise: [number, number];
  /** Level of a lit lamp, share of full scale: the dimmest and the brightest. */
  lit: [number, number];
  repeats: [number, number];
  ready: boolean;
}

function planFrom(random: () => number, range: Range): CapturePlan {
  const ambient: Record<string, number> = {};
  const amplitude: Record<string, number> = {};
  for (const id of LAMPS) {
    ambient[id] = between(random, 0.02, 0.12);
    amplitude[id] = Math.max(0.05, between(random, ...range.lit) - ambient[id]);
  }
  const count = oneOf(random, 1, 3);
  const marked = random() < 0.7;
  let before = '';
  const codes = Array.from({ length: count }, (_, index) => {
    let on = oneOf(random, 0, 9);
    const off = oneOf(random, 0, 9);
    if (`${on}/${off}` === before) on = (on + 1) % 10;
    before = `${on}/${off}`;
    return { on, off, repeats: oneOf(random, ...range.repeats), marked: marked && index > 0 };
  });
  return {
    ready: range.ready ? { times: oneOf(random, 3, 6), periodS: between(random, 0.5, 1.35) } : undefined,
    codes,
    phaseS: between(random, 0.85, 2.4),
    phaseVariation: random() < 0.5 ? 0 : 0.25,
    leadS: between(random, 0.2, 1),
    tailS: between(random, 0.4, 0.75),
    lockLit: random() < 0.8,
    markOffsetS: 0.2,
    light: {
      sampleRateHz: [50, 100, 200][oneOf(random, 0, 2)] ?? 100,
      noise: between(random, ...range.noise),
      ambient,
      amplitude,
      glow: between(random, 0, 0.05),
      ambientDrift: between(random, -0.02, 0.1),
      gainDrift: between(random, -0.2, 0.1),
      loss: between(random, 0, 0.05),
      riseS: between(random, 0.005, 0.025),
      flicker: { share: between(random, 0, 0.06), hertz: 100 },
    },
  };
}

function runAll(count: number, seed: number, range: Range) {
  let exact = 0;
  let wrong = 0;
  let stated = 0;
  for (let index = 0; index < count; index += 1) {
    const random = seededRandom(seed + index * 7919);
    const { capture, truth } = simulateCapture(planFrom(random, range), heron, random);
    const { codes } = decodeCapture(capture, heron);
    stated += codes.length;
    wrong += codes.filter(({ code }) => !truth.codes.some((shown) => shown.code === code)).length;
    if (JSON.stringify(codes.map(({ code, repeats }) => ({ code, repeats }))) === JSON.stringify(truth.codes)) exact += 1;
  }
  return { exact, wrong, stated };
}

// Truth: what the simulated panel played. The shares are this project's own targets, no published values.
describe('many simulated captures', () => {
  test(
    'When the light is fair, then no code is wrong and nearly every capture is read with order and repeats',
    { timeout: 120_000 },
    () => {
      const { exact, wrong } = runAll(300, 1, { noise: [0.002, 0.04], lit: [0.3, 0.95], repeats: [2, 6], ready: true });
      expect(wrong).toBe(0);
      expect(exact).toBeGreaterThanOrEqual(0.98 * 300);
    },
  );

  test('When the light is poor, then of what is stated at 0.999 next to nothing is wrong', { timeout: 120_000 }, () => {
    const { stated, wrong } = runAll(200, 2, { noise: [0.05, 0.2], lit: [0.25, 0.9], repeats: [1, 5], ready: true });
    expect(stated).toBeGreaterThan(150);
    expect(wrong).toBeLessThanOrEqual(1);
  });

  test('When lamps blink at random, then no code is stated', { timeout: 120_000 }, () => {
    let stated = 0;
    for (let seed = 0; seed < 100; seed += 1) {
      const random = seededRandom(seed * 104729 + 7);
      const plan: CapturePlan = { codes: [], phaseS: 1, light: { sampleRateHz: 100 } };
      const { capture } = simulateCapture({ ...plan, leadS: 40 }, heron, random);
      const litUntilUs = LAMPS.map(() => 0);
      const lit = LAMPS.map(() => false);
      capture.timesUs.forEach((timeUs, sample) => {
        LAMPS.forEach((_, lamp) => {
          if (timeUs >= (litUntilUs[lamp] ?? 0)) {
            lit[lamp] = !lit[lamp];
            litUntilUs[lamp] = timeUs + between(random, 0.3, 3) * 1e6;
          }
          const lane = capture.levels[lamp];
          if (lane) lane[sample] = Math.round((lit[lamp] ? 700 : 60) + between(random, -10, 10));
        });
      });
      stated += decodeCapture(capture, heron).codes.length;
    }
    expect(stated).toBe(0);
  });
});
