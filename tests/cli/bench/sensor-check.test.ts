import { afterEach, describe, expect, test } from 'vitest';
import { checkSensors, coveredSensor } from '../../../cli/bench/sensor-check.js';
import type { OpenRig, ProbeEvent } from '../../../cli/instruments/rig.js';
import { benchTerminal, type BenchTerminal } from '../../helpers/bench-terminal.js';
import { heron } from '../../helpers/unit-facts.js';

describe('Which sensor a hand covers', () => {
  test('When a hand darkens one sensor, then it is that one, though its neighbours are shaded too', () => {
    expect(coveredSensor([0.4, 0.4, 0.4], [0.38, 0.05, 0.3])).toBe(1);
  });
  test('When covering lets in light from a lamp behind, then the change counts whatever its direction', () => {
    expect(coveredSensor([0.1, 0.1], [0.1, 0.6])).toBe(1);
  });
  test('When no sensor changed clearly, or two changed alike, then none is said to be covered', () => {
    expect(coveredSensor([0.4, 0.4], [0.38, 0.39])).toBeUndefined();
    expect(coveredSensor([0.4, 0.4], [0.1, 0.12])).toBeUndefined();
    expect(coveredSensor([], [])).toBeUndefined();
  });
});

describe('The sensor check before the first capture', () => {
  let bench: BenchTerminal;
  afterEach(() => bench.remove());

  /** A probe in daylight. The hand is on the sensor of `order` that was asked for last, and stays there until the next is asked for. */
  function handOnProbe(order: readonly number[]): OpenRig {
    const asked = (): string[] => bench.stderr().match(/Cover the sensor|Take the hand away/g) ?? [];
    const probe = {
      scaleMax: 100,
      async *read(signal: AbortSignal): AsyncGenerator<ProbeEvent> {
        for (let tUs = 0; !signal.aborted; tUs += 10_000) {
          const words = asked();
          const hand =
            words.at(-1) === 'Cover the sensor' ? order[words.filter((word) => word === 'Cover the sensor').length - 1] : undefined;
          yield { kind: 'sample', tUs, levels: heron.lamps.map((_lamp, sensor) => (sensor === hand ? 3 : 40)) };
          await new Promise((resolve) => setTimeout(resolve, 5));
        }
      },
    };
    return { openProbe: () => Promise.resolve(probe) } as unknown as OpenRig;
  }

  test('When each sensor is on its own lamp, then it is said and the capture may begin', async () => {
    bench = benchTerminal({ terminal: true });
    for (const { label } of heron.lamps) bench.when(`Cover the sensor on ${label}`, ' ');
    await checkSensors(bench.context, handOnProbe([0, 1, 2, 3, 4, 5]), heron);
    expect(bench.stderr()).toContain('Every sensor is on its lamp');
    expect(bench.raw()).toBe(0);
  });

  test('When two sensors are swapped, then it says which one changed and goes on only when that is put right', async () => {
    bench = benchTerminal({ terminal: true });
    bench.when('on Fill', ' ').when('Take the hand away', ' ');
    for (const { label } of heron.lamps) bench.when(`Cover the sensor on ${label}`, ' ');
    await checkSensors(bench.context, handOnProbe([1, 0, 1, 2, 3, 4, 5]), heron);
    expect(bench.stderr()).toMatch(/The sensor for Wash changed\. Move the sensors, or write\s+their\s+order\s+down/);
    expect(bench.stderr()).toContain('Every sensor is on its lamp');
  });
});
