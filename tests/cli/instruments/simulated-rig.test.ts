import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterEach, describe, expect, test } from 'vitest';
import { openRig, type OpenRig, type ProbeEvent, type Quantity } from '../../../cli/instruments/rig.js';
import { lampSamples, marksIn } from '../../../cli/instruments/simulated/lamp-source.js';
import { parseScenario } from '../../../cli/instruments/simulated/scenario.js';
import { BUILT_IN_SCENARIOS } from '../../../cli/instruments/simulated/scenarios/built-in.js';
import { BadInputError } from '../../../shared/errors.js';
import { judge } from '../../../shared/measure/judge.js';

/** Panel order of the invented Heron H6. */
const LAMPS = ['fill', 'wash', 'rinse', 'drain', 'spin', 'lock'];

const rigs: OpenRig[] = [];
async function rigOf(name: string): Promise<OpenRig> {
  const rig = await openRig(`sim:${name}`, '/nowhere');
  rigs.push(rig);
  return rig;
}
afterEach(async () => {
  await Promise.all(rigs.splice(0).map((rig) => rig.close()));
});

/** The Heron's measured checks: quantity, unit, limits. Invented, as its sheet is. */
const CHECKS: readonly { id: string; quantity: Quantity; unit: string; low?: number; high?: number }[] = [
  { id: 'protective-conductor', quantity: 'resistance', unit: 'ohm', high: 0.3 },
  { id: 'insulation', quantity: 'insulation resistance', unit: 'Mohm', low: 1 },
  { id: 'drain-pump-winding', quantity: 'resistance', unit: 'ohm', low: 140, high: 180 },
  { id: 'heater', quantity: 'resistance', unit: 'ohm', low: 24, high: 29 },
  { id: 'inlet-valve-coil', quantity: 'resistance', unit: 'ohm', low: 3300, high: 4300 },
  { id: 'protective-conductor-current', quantity: 'current ac', unit: 'mA', high: 3.5 },
];

async function verdicts(rig: OpenRig): Promise<Record<string, string>> {
  const outcome: Record<string, string> = {};
  for (const { id, quantity, unit, ...limits } of CHECKS) {
    rig.hands?.probesOn(id);
    const meter = await rig.openMeterFor(quantity, unit);
    const value = await meter.measure();
    outcome[id] = judge({ value, unit, ...limits, accuracy: meter.accuracy, resolution: meter.resolution }).verdict;
  }
  return outcome;
}

async function seconds(rig: OpenRig, lamps: readonly string[], until: number): Promise<ProbeEvent[]> {
  const probe = await rig.openProbe(lamps);
  const stop = new AbortController();
  const events: ProbeEvent[] = [];
  for await (const event of probe.read(stop.signal)) {
    events.push(event);
    if (event.kind === 'sample' && event.tUs >= until * 1_000_000) stop.abort();
  }
  return events;
}

/** Which lamps are lit at a time: above 40 % of full scale. */
function litAt(events: ProbeEvent[], lamps: readonly string[], atS: number): string[] {
  const sample = events.find((event) => event.kind === 'sample' && event.tUs >= atS * 1_000_000);
  return sample?.kind === 'sample' ? lamps.filter((_lamp, index) => (sample.levels[index] ?? 0) > 0.4 * 1023) : [];
}

describe('a simulated rig', () => {
  test('When it is opened, then it says that it is simulated and has hands', async () => {
    const rig = await rigOf('heron-mend');
    expect(rig).toMatchObject({ name: 'sim:heron-mend', simulated: true });
    expect(rig.hands).toBeDefined();
  });

  test('When the name is unknown, then the known ones are named', async () => {
    await expect(openRig('sim:heron', '/nowhere')).rejects.toThrow(/heron-mend, heron-good, heron-flaky/);
    await expect(openRig('sim:constructor', '/nowhere')).rejects.toBeInstanceOf(BadInputError);
    await expect(openRig('sim:/nowhere/own.yaml', '/nowhere')).rejects.toMatchObject({ file: '/nowhere/own.yaml' });
  });

  test('When nothing is wrong, then every check passes with the meters of the rig', async () => {
    expect(new Set(Object.values(await verdicts(await rigOf('heron-good'))))).toEqual(new Set(['pass']));
  });

  test('When the pump is broken, then its winding fails, and after the repair everything passes', async () => {
    const rig = await rigOf('heron-mend');
    expect(await verdicts(rig)).toMatchObject({ 'drain-pump-winding': 'fail', 'protective-conductor': 'pass', insulation: 'pass' });
    rig.hands?.repaired();
    expect(new Set(Object.values(await verdicts(rig)))).toEqual(new Set(['pass']));
  });

  test('When a reading is taken, then unit, accuracy and resolution are those of its range', async () => {
    const rig = await rigOf('heron-mend');
    const meter = await rig.openMeterFor('resistance', 'ohm');
    rig.hands?.probesOn('drain-pump-winding');
    expect(await meter.measure()).toBe(96.4);
    expect(meter).toMatchObject({
      id: 'M-03',
      unit: 'ohm',
      accuracyText: '0.5%+3',
      accuracy: { percentOfReading: 0.5, digits: 3 },
      resolution: 0.1,
    });
    rig.hands?.probesOn('protective-conductor');
    expect(await meter.measure()).toBe(0.084);
    expect(meter).toMatchObject({ accuracyText: '2%+4', resolution: 0.001 });
    rig.hands?.probesOn('insulation');
    const tester = await rig.openMeterFor('insulation resistance', 'Mohm');
    expect(await tester.measure()).toBe(2.31);
    expect(tester).toMatchObject({ id: 'M-05', unit: 'Mohm', resolution: 0.01 });
  });

  test('When the probes hang in the air, then the meter shows overload', async () => {
    const rig = await rigOf('heron-good');
    const meter = await rig.openMeterFor('resistance');
    await expect(meter.measure()).rejects.toMatchObject({ name: 'OverloadError' });
    rig.hands?.probesOn('protective-conductor-current');
    await expect(meter.measure()).rejects.toMatchObject({ name: 'OverloadError' });
  });

  test('When the bench is flaky, then each failure is its own error and the next try reads', async () => {
    const rig = await rigOf('heron-flaky');
    const expected: Record<string, string> = {
      'protective-conductor': 'InstrumentTimeoutError',
      insulation: 'OverloadError',
      'drain-pump-winding': 'GarbageError',
      heater: 'NotANumberError',
      'protective-conductor-current': 'DisconnectedError',
    };
    for (const { id, quantity, unit } of CHECKS.filter((check) => expected[check.id] !== undefined)) {
      rig.hands?.probesOn(id);
      await expect((await rig.openMeterFor(quantity, unit)).measure(), id).rejects.toMatchObject({ name: expected[id] });
      expect(await (await rig.openMeterFor(quantity, unit)).measure(), id).toBeGreaterThan(0);
    }
    const lost = (await seconds(rig, LAMPS, 20)).reduce((sum, event) => sum + (event.kind === 'gap' ? event.lost : 0), 0);
    // 2 % of 2000 lines.
    expect(lost).toBeGreaterThan(15);
    expect(lost).toBeLessThan(80);
  });

  test('When the machine is broken, then its lamps show the ready blink and then both codes', async () => {
    const rig = await rigOf('heron-mend');
    rig.hands?.lampsShow('lamps', 'capture');
    const events = await seconds(rig, LAMPS, 45);
    // Ready to 6.4 s (8 blinks of 0.8 s), then G5K3: spin with 4 + 1, then 2 + 1; then G2K9: spin with 2, then 8 + 1.
    expect(litAt(events, LAMPS, 0.2)).toEqual(['fill', 'wash', 'rinse', 'drain', 'spin']);
    expect(litAt(events, LAMPS, 0.6)).toEqual([]);
    expect(litAt(events, LAMPS, 7)).toEqual(['fill', 'rinse', 'spin']);
    expect(litAt(events, LAMPS, 8.2)).toEqual(['fill', 'wash']);
    const [next] = rig.hands?.marks() ?? [];
    expect(next).toBe(25_600_000);
    expect(litAt(events, LAMPS, 26)).toEqual(['wash', 'spin']);
    expect(litAt(events, LAMPS, 27.2)).toEqual(['fill', 'drain']);
    expect(events.every((event) => event.kind === 'sample')).toBe(true);
  });

  test('When the columns are asked for in another order, then they come in that order', async () => {
    const rig = await rigOf('heron-mend');
    const order = ['lock', 'spin', 'fill'];
    expect(litAt(await seconds(rig, order, 8), order, 7)).toEqual(['spin', 'fill']);
    await expect(rig.openProbe(['fill', 'heat'])).rejects.toThrow(/'heat'/);
  });

  test('When the calibration run is watched, then the lock is lit for 150 s and then all is dark', async () => {
    const rig = await rigOf('heron-good');
    rig.hands?.lampsShow('calibration', 'watch');
    const events = await seconds(rig, LAMPS, 156);
    expect([1, 3, 151, 153, 155].map((atS) => litAt(events, LAMPS, atS))).toEqual([[], ['lock'], ['lock'], [], []]);
  });

  test('When a step asks, then the scenario answers by step or by kind', async () => {
    const rig = await rigOf('heron-mend');
    expect(rig.hands?.answer('isolate', 'caution')).toBe('yes');
    expect(rig.hands?.answer('visual', 'inspect')).toBe('pass');
    expect(rig.hands?.answer('x', 'unheard-of')).toBeUndefined();
    expect(rig.hands?.repairDetails('mended')).toMatchObject({
      part: 'Drain pump',
      partSource: { kind: 'new' },
      minutes: 30,
      costMinor: 2450,
    });
  });

  test('When two rigs of one scenario are open, then they do not share a machine', async () => {
    const [one, other] = [await rigOf('heron-mend'), await rigOf('heron-mend')];
    one.hands?.repaired();
    for (const rig of [one, other]) rig.hands?.probesOn('drain-pump-winding');
    const readings = await Promise.all([one, other].map(async (rig) => (await rig.openMeterFor('resistance')).measure()));
    expect(readings).toEqual([157.7, 96.4]);
  });
});

describe('a scenario', () => {
  test.each(Object.keys(BUILT_IN_SCENARIOS))('When it is the built-in %s, then it is sound and named so', (name) => {
    expect(parseScenario(BUILT_IN_SCENARIOS[name] ?? '', name).name).toBe(name);
  });

  const sound = BUILT_IN_SCENARIOS['heron-good'] ?? '';
  test.each([
    ['no YAML', '[', /no YAML/],
    ['a plan that is not there', sound.replace('watch: calibration}', 'watch: spinning}'), /no lamp plan 'spinning'/],
    ['a lamp that is not there', sound.replace('lamps: [lock], seconds: 150', 'lamps: [heat], seconds: 150'), /no lamp 'heat'/],
    ['a measurement without a unit', sound.replace('{unit: ohm, before: [157.7]}', '{before: [157.7]}'), /drain-pump-winding\.unit/],
  ])('When it has %s, then it is refused', (_what, text, reason) => {
    expect(() => parseScenario(text, 'own.yaml')).toThrow(BadInputError);
    expect(() => parseScenario(text, 'own.yaml')).toThrow(reason);
  });

  test("When it is a file of the shop's own, then it is played", async () => {
    const folder = mkdtempSync(join(tmpdir(), 'refettle-scenario-'));
    const file = join(folder, 'own.yaml');
    writeFileSync(file, sound.replace('name: heron-good', 'name: own').replace('[157.7]', '[150, 160]'));
    const rig = await rigOf(file);
    rig.hands?.probesOn('drain-pump-winding');
    const meter = await rig.openMeterFor('resistance');
    expect([await meter.measure(), await meter.measure(), await meter.measure()]).toEqual([150, 160, 160]);
    rmSync(folder, { recursive: true });
  });

  test('When a plan is sampled, then times grow, levels stay on the scale, and the same seed gives the same samples', () => {
    const { panel, lampPlans } = parseScenario(BUILT_IN_SCENARIOS['heron-mend'] ?? '', 'heron-mend');
    const plan = lampPlans['find'] ?? [];
    const take = (): { tUs: number; levels: readonly number[] }[] => {
      const taken = [];
      for (const sample of lampSamples(plan, panel, { sampleRateHz: 100, scaleMax: 1023, seed: 5 })) {
        if (taken.push(sample) === 5000) break;
      }
      return taken;
    };
    const samples = take();
    expect(take()).toEqual(samples);
    expect(samples.every(({ tUs }, index) => index === 0 || tUs > (samples[index - 1]?.tUs ?? 0))).toBe(true);
    expect(samples.every(({ levels }) => levels.every((level) => Number.isInteger(level) && level >= 0 && level <= 1023))).toBe(true);
    expect(marksIn(plan, panel)).toEqual([25_600_000]);
  });
});
