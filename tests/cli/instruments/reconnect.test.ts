import { afterEach, describe, expect, test } from 'vitest';
import { assembleRig } from '../../../cli/instruments/assemble-rig.js';
import { parseRig } from '../../../cli/instruments/rig-file.js';
import type { OpenRig, ProbeEvent } from '../../../cli/instruments/rig.js';
import { parseScenario } from '../../../cli/instruments/simulated/scenario.js';
import { BUILT_IN_SCENARIOS } from '../../../cli/instruments/simulated/scenarios/built-in.js';
import { SimulatedMeter } from '../../../cli/instruments/simulated/simulated-meter.js';
import { plugIn } from '../../../cli/instruments/simulated/simulated-port.js';
import { simulateScenario } from '../../../cli/instruments/simulated/simulated-rig.js';
import { decodeCapture } from '../../../shared/decode/decode-capture.js';
import { heron } from '../../helpers/unit-facts.js';

const LAMPS = ['fill', 'wash', 'rinse', 'drain', 'spin', 'lock'];
const rigs: OpenRig[] = [];
afterEach(async () => {
  await Promise.all(rigs.splice(0).map((rig) => rig.close()));
});

/** A scenario of the Heron with its own faults, and what the rig says. */
async function rigWith(changes: Record<string, unknown>, { patient = true }: { patient?: boolean } = {}) {
  const said: string[] = [];
  const stop = new AbortController();
  const scenario = { ...parseScenario(BUILT_IN_SCENARIOS['heron-mend'] ?? '', 'heron-mend'), ...changes };
  const rig = await simulateScenario(
    parseScenario(JSON.stringify(scenario), 'test'),
    patient ? { say: (line) => said.push(line), signal: stop.signal } : undefined,
  );
  rigs.push(rig);
  return { rig, said, stop };
}

async function record(rig: OpenRig, untilS: number): Promise<ProbeEvent[]> {
  const probe = await rig.openProbe(LAMPS);
  const stop = new AbortController();
  const events: ProbeEvent[] = [];
  for await (const event of probe.read(stop.signal)) {
    events.push(event);
    if (event.kind === 'sample' && event.tUs >= untilS * 1_000_000) stop.abort();
  }
  return events;
}

function answerOf(events: readonly ProbeEvent[]) {
  const samples = events.filter((event) => event.kind === 'sample');
  const gaps = events.filter((event) => event.kind === 'gap').map(({ atUs, lost }) => ({ atUs, lost }));
  const timesUs = samples.map(({ tUs }) => tUs);
  const header = {
    format: 'refettle.lamps',
    version: 1,
    capturedAt: '2026-03-03T09:00:00Z',
    source: 'simulated',
    lamps: LAMPS,
    scale: { unit: 'counts', max: 1023 },
    sampleRateHz: 100,
  } as const;
  const levels = LAMPS.map((_lamp, index) => samples.map((sample) => sample.levels[index] ?? 0));
  const endUs = timesUs.at(-1) ?? 0;
  return decodeCapture({ header: { ...header, lamps: [...LAMPS] }, timesUs, levels, marks: [], gaps, endUs, cut: false }, heron);
}

const risesIn = (events: readonly ProbeEvent[]): boolean => {
  const times = events.filter((event) => event.kind === 'sample').map(({ tUs }) => tUs);
  return times.every((time, index) => index === 0 || time > (times[index - 1] ?? 0));
};

describe('a capture', () => {
  test('When the probe is unplugged and comes back, then the capture goes on with a gap as long as it was away, and the code is the right one', async () => {
    const { rig, said } = await rigWith({ probeFaults: [{ fault: 'unplug', at: 12, seconds: 4 }] });
    rig.hands?.lampsShow('find');
    const events = await record(rig, 25);
    const gap = events.find((event) => event.kind === 'gap');
    // 4 s at 100 Hz, and what it takes to look for the port and to open it again (at 25 times the speed: some seconds of the scenario).
    expect(gap?.kind === 'gap' && gap.lost).toBeGreaterThanOrEqual(380);
    // What was on its way when the plug came out is lost with it: a tick of the simulated probe or a few.
    expect(gap?.kind === 'gap' && gap.atUs / 1e6).toBeGreaterThan(9);
    expect(gap?.kind === 'gap' && gap.atUs / 1e6).toBeLessThan(12.1);
    expect(risesIn(events)).toBe(true);
    expect(said[0]).toMatch(/P-01 on \/sim\/\S+: it was unplugged or switched off\. Waiting up to 60 s for it to come back/);
    expect(said[1]).toMatch(/^P-01 is back after \d+ s; the recording goes on, with a gap\.$/);
    // The first code of the scenario is G5K3: what was recorded on both sides says so, nothing was made up between.
    const codes = answerOf(events).codes.map(({ code }) => code);
    expect(codes.length).toBeGreaterThan(0);
    expect(new Set(codes)).toEqual(new Set(['G5K3']));
  });

  test('When the probe does not come back in time, then that is said, and what came before was handed out', async () => {
    const { rig, said } = await rigWith({ probeFaults: [{ fault: 'unplug', at: 5, seconds: 500 }], reconnectSeconds: 0.2 });
    const probe = await rig.openProbe(LAMPS);
    const events: ProbeEvent[] = [];
    const reading = (async () => {
      for await (const event of probe.read(new AbortController().signal)) events.push(event);
    })();
    await expect(reading).rejects.toMatchObject({
      name: 'DisconnectedError',
      message: expect.stringContaining('did not come back within 0.2 s') as string,
    });
    expect(events.length).toBeGreaterThan(450);
    expect(said).toHaveLength(1);
  });

  test('When the technician stops it while the plug is out, then it ends well with what came', async () => {
    const { rig, said } = await rigWith({ probeFaults: [{ fault: 'unplug', at: 5, seconds: 500 }] });
    const probe = await rig.openProbe(LAMPS);
    const stop = new AbortController();
    let samples = 0;
    for await (const event of probe.read(stop.signal, (line) => (said.push(line), stop.abort())))
      samples += event.kind === 'sample' ? 1 : 0;
    expect(samples).toBeGreaterThan(450);
    expect(said).toHaveLength(1);
  });

  test('When Ctrl-C is pressed while the plug is out, then the waiting ends', async () => {
    const { rig, stop } = await rigWith({ probeFaults: [{ fault: 'unplug', at: 5, seconds: 500 }] });
    const probe = await rig.openProbe(LAMPS);
    const reading = (async () => {
      for await (const _event of probe.read(new AbortController().signal, () => stop.abort()));
    })();
    await expect(reading).rejects.toMatchObject({ name: 'StoppedError' });
  });

  test('When the probe starts its clock again, then times go on rising and one gap says it', async () => {
    const { rig } = await rigWith({ probeFaults: [{ fault: 'restart', at: 10 }] });
    const events = await record(rig, 20);
    expect(risesIn(events)).toBe(true);
    const gaps = events.filter((event) => event.kind === 'gap');
    expect(gaps).toHaveLength(1);
    expect((gaps[0]?.kind === 'gap' ? gaps[0].atUs : 0) / 1e6).toBeCloseTo(10, 0);
  });

  test('When the probe falls silent for a while, then there is a gap of that while', async () => {
    const { rig } = await rigWith({ probeFaults: [{ fault: 'silence', at: 10, seconds: 3 }] });
    const events = await record(rig, 20);
    // 3 s at 100 Hz.
    const lost = events.reduce((sum, event) => sum + (event.kind === 'gap' ? event.lost : 0), 0);
    expect(lost).toBeGreaterThanOrEqual(298);
    expect(lost).toBeLessThanOrEqual(302);
  });
});

describe('a measurement', () => {
  const heaterIs = (...before: unknown[]) => ({ measurements: { heater: { unit: 'ohm', before }, insulation: { unit: 'Mohm', before } } });

  test('When the meter is unplugged in the middle and comes back, then it is asked again', async () => {
    const { rig, said } = await rigWith(heaterIs({ unplugged: 5 }, 26.8));
    rig.hands?.probesOn('heater');
    expect(await (await rig.openMeterFor('resistance')).measure()).toBe(26.8);
    expect(said[1]).toMatch(/^M-03 is back after \d+ s; the measurement is asked for again\.$/);
  });

  test('When it does not come back, or nobody waits, then there is no reading', async () => {
    const { rig } = await rigWith({ ...heaterIs({ unplugged: 500 }, 26.8), reconnectSeconds: 0.1 });
    rig.hands?.probesOn('heater');
    await expect((await rig.openMeterFor('resistance')).measure()).rejects.toMatchObject({ name: 'DisconnectedError' });
    const { rig: other } = await rigWith(heaterIs('unplugged', 26.8), { patient: false });
    other.hands?.probesOn('heater');
    await expect((await other.openMeterFor('resistance')).measure()).rejects.toMatchObject({ name: 'DisconnectedError' });
  });

  test('When the plug falls out again and again, then it is given up', async () => {
    const { rig, said } = await rigWith(heaterIs('unplugged', 'unplugged', 'unplugged', 'unplugged', 26.8));
    rig.hands?.probesOn('heater');
    await expect((await rig.openMeterFor('resistance')).measure()).rejects.toMatchObject({ name: 'DisconnectedError' });
    expect(said.filter((line) => line.includes('is back'))).toHaveLength(3);
  });

  test('When the tester is unplugged in a test at 500 V, then the test is not begun again by itself', async () => {
    const { rig } = await rigWith(heaterIs({ unplugged: 5 }, 2.31));
    rig.hands?.probesOn('insulation');
    const meter = await rig.openMeterFor('insulation resistance');
    await expect(meter.measure()).rejects.toMatchObject({ name: 'TestBrokenOffError', instrument: 'M-05' });
    expect(await meter.measure()).toBe(2.31);
  });

  test('When any measurement on a machine under voltage loses its meter, or gets two answers, then it is not asked for again by itself', async () => {
    const energised = async (...values: Parameters<typeof heaterIs>) => {
      const { rig } = await rigWith(heaterIs(...values));
      rig.hands?.probesOn('heater');
      return rig.openMeterFor('resistance', 'ohm', { energises: true });
    };
    await expect((await energised({ unplugged: 5 }, 26.8)).measure()).rejects.toMatchObject({ name: 'TestBrokenOffError' });
    await expect((await energised({ stale: 26.8 }, 26.8)).measure()).rejects.toMatchObject({ name: 'TwoAnswersError' });
  });

  test.each([
    ['twice', { twice: 26.8 }],
    ['behind an older value', { stale: 26.8 }],
    ['between NULs', { nuls: 26.8 }],
  ])('When the answer comes %s, then the reading is the right one', async (_how, first) => {
    const { rig } = await rigWith(heaterIs(first, 26.8));
    rig.hands?.probesOn('heater');
    const meter = await rig.openMeterFor('resistance');
    expect(await meter.measure()).toBe(26.8);
    expect(await meter.measure()).toBe(26.8);
  });

  test.each([
    ['late', { late: 11.1 }, 'InstrumentTimeoutError'],
    ['half', { half: 11.1 }, 'HalfAnswerError'],
  ])('When the answer comes %s, then it is no reading, and never that of the next question', async (_how, first, name) => {
    const { rig } = await rigWith(heaterIs(first, 26.8));
    rig.hands?.probesOn('heater');
    const meter = await rig.openMeterFor('resistance');
    await expect(meter.measure()).rejects.toMatchObject({ name });
    expect(await meter.measure()).toBe(26.8);
  });
});

describe('plugs that are swapped', () => {
  test('When meter and probe are swapped, then each is used where it answers, and it is said once', async () => {
    const { rig, said } = await rigWith({ swapped: ['meter', 'probe'] });
    rig.hands?.probesOn('drain-pump-winding');
    expect(await (await rig.openMeterFor('resistance')).measure()).toBe(96.4);
    rig.hands?.lampsShow('find');
    expect((await record(rig, 1)).length).toBeGreaterThan(90);
    expect(said).toHaveLength(1);
    expect(said[0]).toMatch(
      /^M-03 and P-01 are swapped on their ports: M-03 answers on \/sim\/\S+\/probe\. It is used there; refettle rig check/,
    );
  });

  const RIG = `
format: refettle.rig
version: 1
name: bench-2
instruments:
  - {id: M-03, kind: meter, port: PORTS/a, IDENTITY accuracy: {resistance: {unit: ohm, accuracy: 1%+1, resolution: 1}}}
  - {id: M-05, kind: insulation-tester, port: PORTS/b, identification: 'Millrace,IT-1,5,1.0', accuracy: {}}
`;
  let benches = 0;
  /** M-03's port with an instrument that says who it is; nothing hangs on the other port. */
  async function answering(identification: string, written: string): Promise<OpenRig> {
    const ports = `/sim/swap-${(benches += 1)}`;
    const instrument = new SimulatedMeter(identification, () => 5, { unplug: () => undefined });
    const { binding } = await plugIn([{ path: `${ports}/a`, instrument }]);
    const text = RIG.replaceAll('PORTS', ports).replace('IDENTITY', written === '' ? '' : `identification: '${written}',`);
    const rig = assembleRig(parseRig(text, 'rig.yaml'), { binding });
    rigs.push(rig);
    return rig;
  }

  test('When another instrument of the rig answers, then both are named', async () => {
    for (const written of ['Millrace,BM-4,3,1.0', '']) {
      const rig = await answering('Millrace,IT-1,5,1.1', written);
      await expect(rig.openMeterFor('resistance')).rejects.toMatchObject({
        name: 'WrongInstrumentError',
        message: expect.stringContaining("M-03 and M-05 are swapped: what answers on this port is 'Millrace,IT-1,5,1.1'") as string,
      });
    }
  });

  test('When a stranger hangs where one of two without a serial number should, then the other is not taken for it', async () => {
    const ports = '/sim/doubles';
    const meter = (says: string): SimulatedMeter => new SimulatedMeter(says, () => 5, { unplug: () => undefined });
    const { binding } = await plugIn([
      { path: `${ports}/a`, instrument: meter('Dyehouse,X-1,0,2.0') },
      { path: `${ports}/b`, instrument: meter('Millrace,BM-4,0,1.0') },
    ]);
    const text = RIG.replaceAll('PORTS', ports)
      .replace('IDENTITY', "identification: 'Millrace,BM-4,0,1.0',")
      .replace('Millrace,IT-1,5,1.0', 'Millrace,BM-4,0,1.0');
    const rig = assembleRig(parseRig(text, 'rig.yaml'), { binding });
    rigs.push(rig);
    await expect(rig.openMeterFor('resistance')).rejects.toMatchObject({ name: 'WrongInstrumentError' });
  });

  test('When a stranger answers, then it is not taken for the one that is written down', async () => {
    const rig = await answering('Dyehouse,X-1,0,2.0', 'Millrace,BM-4,3,1.0');
    await expect(rig.openMeterFor('resistance')).rejects.toMatchObject({
      name: 'WrongInstrumentError',
      message: expect.stringContaining("it should be 'Millrace,BM-4,3,1.0', and what answers there is 'Dyehouse,X-1,0,2.0'") as string,
    });
  });

  test.each([
    ['other firmware', 'Millrace,BM-4,3,1.7'],
    ['no serial number', 'Millrace,BM-4,0,1.0'],
    ['other case', 'MILLRACE,BM-4,3,1.0'],
  ])('When the same instrument answers with %s, then it is taken', async (_what, identification) => {
    const rig = await answering(identification, 'Millrace,BM-4,3,1.0');
    expect((await rig.openMeterFor('resistance')).identification).toBe(identification);
  });

  test('When nothing is written down about an instrument, then whatever answers is taken', async () => {
    const rig = await answering('Dyehouse,X-1,0,2.0', '');
    expect(await (await rig.openMeterFor('resistance')).measure()).toBe(5);
  });
});
