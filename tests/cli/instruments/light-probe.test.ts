import { afterEach, describe, expect, test } from 'vitest';
import { DisconnectedError, GarbageError } from '../../../cli/instruments/instrument-error.js';
import { openLightProbe, type LightProbeOptions } from '../../../cli/instruments/light-probe.js';
import { writeSampleLine } from '../../../cli/instruments/sample-line.js';
import type { ProbeEvent } from '../../../cli/instruments/sample-timeline.js';
import { SimulatedProbe, type SampleSource } from '../../../cli/instruments/simulated/simulated-probe.js';
import type { Transport } from '../../../cli/instruments/transport.js';
import { seededRandom } from '../../../shared/lamps/seeded-random.js';
import { opened, ScriptedInstrument } from './scripted-instrument.js';

let open: Transport[] = [];
afterEach(async () => {
  await Promise.all(open.map((transport) => transport.close()));
  open = [];
});

const settings: LightProbeOptions = { sampleRateHz: 100, scaleMax: 1023, nowUs: () => performance.now() * 1000 };

/** 100 samples a second; the level of sensor 0 counts the samples. */
function* counting(seconds: number): SampleSource {
  for (let index = 0; index < seconds * 100; index += 1) yield { tUs: index * 10_000, levels: [index % 1024, 7] };
}

async function probeOn(instrument: SimulatedProbe) {
  const { transport, unplug } = await opened(instrument, 'P-01');
  open.push(transport);
  return { probe: await openLightProbe(transport, settings), unplug, transport };
}

/** Reads until the events satisfy `enough`. */
async function collect(
  read: (signal: AbortSignal) => AsyncGenerator<ProbeEvent>,
  enough: (events: ProbeEvent[]) => boolean,
): Promise<ProbeEvent[]> {
  const stop = new AbortController();
  const events: ProbeEvent[] = [];
  for await (const event of read(stop.signal)) {
    events.push(event);
    if (enough(events)) stop.abort();
  }
  return events;
}

const samplesOf = (events: ProbeEvent[]) => events.filter((event) => event.kind === 'sample');
const lostIn = (events: ProbeEvent[]): number => events.reduce((sum, event) => sum + (event.kind === 'gap' ? event.lost : 0), 0);

describe('the light probe', () => {
  test('When it is opened, then it says how many sensors it has and nothing is sent yet', async () => {
    const { probe } = await probeOn(
      new SimulatedProbe({ identification: 'Millrace,LP-6,0,1.0', sensorCount: 2, source: () => counting(1), speed: 1 }),
    );
    expect(probe.sensorCount).toBe(2);
    expect(probe.identification).toBe('Millrace,LP-6,0,1.0');
  });

  test('When it is read, then every sample comes, in order, from 0 on', async () => {
    const { probe } = await probeOn(
      new SimulatedProbe({ identification: 'Millrace,LP-6,0,1.0', sensorCount: 2, source: () => counting(60), speed: 200 }),
    );
    const samples = samplesOf(
      await collect(
        (signal) => probe.read(signal),
        (events) => events.length >= 5000,
      ),
    );
    expect(samples.length).toBeGreaterThanOrEqual(5000);
    samples.forEach((sample, index) => expect(sample).toEqual({ kind: 'sample', tUs: index * 10_000, levels: [index % 1024, 7] }));
  });

  test('When its clock wraps while it is read, then time goes on without a gap', async () => {
    const clockStartUs = 2 ** 32 - 1_000_000;
    const { probe } = await probeOn(
      new SimulatedProbe({ identification: 'Millrace,LP-6,0,1.0', sensorCount: 2, source: () => counting(5), speed: 100, clockStartUs }),
    );
    const events = await collect(
      (signal) => probe.read(signal),
      (seen) => seen.length >= 300,
    );
    expect(lostIn(events)).toBe(0);
    expect(events[299]).toMatchObject({ kind: 'sample', tUs: 2_990_000 });
  });

  test('When lines are damaged or missing, then what came and what was lost add up to what was sent', async () => {
    const trouble = { damaged: 0.05, missing: 0.05, random: seededRandom(7) };
    const { probe } = await probeOn(
      new SimulatedProbe({ identification: 'Millrace,LP-6,0,1.0', sensorCount: 2, source: () => counting(30), speed: 100, trouble }),
    );
    const events = await collect(
      (signal) => probe.read(signal),
      (seen) => (seen.at(-1)?.kind === 'sample' ? samplesOf(seen).length >= 2000 : false),
    );
    const samples = samplesOf(events);
    // Sample number n of the source stands at n periods; losses before the first sample have no clock to be counted by.
    const [first, last] = [samples[0]?.levels[0] ?? 0, samples.at(-1)];
    const sent = (last?.tUs ?? 0) / 10_000 + 1;
    expect(samples.length + lostIn(events.slice(events.findIndex(({ kind }) => kind === 'sample')))).toBeGreaterThanOrEqual(sent);
    expect(lostIn(events)).toBeGreaterThan(100);
    samples.forEach((sample) => expect(sample.levels[0]).toBe((sample.tUs / 10_000 + first) % 1024));
  });

  test('When it is read twice, then each reading begins at 0', async () => {
    const { probe } = await probeOn(
      new SimulatedProbe({ identification: 'Millrace,LP-6,0,1.0', sensorCount: 2, source: () => counting(60), speed: 100 }),
    );
    for (let time = 0; time < 2; time += 1) {
      const events = await collect(
        (signal) => probe.read(signal),
        (seen) => seen.length >= 50,
      );
      expect(events[0]).toEqual({ kind: 'sample', tUs: 0, levels: [0, 7] });
    }
  });

  test('When the reader leaves in the middle, then the probe is told to stop', async () => {
    const received: string[] = [];
    const instrument = new ScriptedInstrument((line) => {
      received.push(line);
      if (line === '*IDN?') return 'Millrace,LP-1,0,1.0\n';
      if (line === 'SYSTem:ERRor?') return '0,"No error"\n';
      if (line === 'SENSe:LAMP:COUNt?') return '1\n';
      return line === 'INITiate:CONTinuous ON'
        ? `${writeSampleLine({ tUs: 5, levels: [1] })}\n${writeSampleLine({ tUs: 10_005, levels: [2] })}\n`
        : undefined;
    });
    const { transport } = await opened(instrument, 'P-01');
    open.push(transport);
    const probe = await openLightProbe(transport, settings);
    for await (const event of probe.read(new AbortController().signal)) {
      expect(event).toEqual({ kind: 'sample', tUs: 0, levels: [1] });
      break;
    }
    expect(received.slice(-2)).toEqual(['INITiate:CONTinuous OFF', 'SYSTem:ERRor?']);
  });

  test('When it was left running by somebody else, then it is stopped before it is asked', async () => {
    const { transport } = await opened(
      new SimulatedProbe({ identification: 'Millrace,LP-6,0,1.0', sensorCount: 2, source: () => counting(600), speed: 50 }),
      'P-01',
    );
    open.push(transport);
    await transport.write('INITiate:CONTinuous ON');
    await new Promise((resolve) => setTimeout(resolve, 50));
    const probe = await openLightProbe(transport, settings);
    expect(probe.sensorCount).toBe(2);
    const events = await collect(
      (signal) => probe.read(signal),
      (seen) => seen.length >= 10,
    );
    expect(lostIn(events)).toBe(0);
  });

  test('When the cable is pulled, then what came before is handed out and then it is said', async () => {
    const { probe, unplug } = await probeOn(
      new SimulatedProbe({ identification: 'Millrace,LP-6,0,1.0', sensorCount: 2, source: () => counting(600), speed: 10 }),
    );
    const events: ProbeEvent[] = [];
    const reading = (async () => {
      for await (const event of probe.read(new AbortController().signal)) {
        events.push(event);
        if (events.length === 100) unplug();
      }
    })();
    await expect(reading).rejects.toBeInstanceOf(DisconnectedError);
    expect(events.length).toBeGreaterThanOrEqual(100);
  });

  test('When it falls silent, then it is reminded once, and then given up', async () => {
    let started = 0;
    const instrument = new ScriptedInstrument((line) => {
      if (line === '*IDN?') return 'Millrace,LP-1,0,1.0\n';
      if (line === 'SYSTem:ERRor?') return '0,"No error"\n';
      if (line === 'SENSe:LAMP:COUNt?') return '1\n';
      if (line === 'INITiate:CONTinuous ON') started += 1;
      return undefined;
    });
    const { transport } = await opened(instrument, 'P-01');
    open.push(transport);
    const probe = await openLightProbe(transport, settings);
    await expect(
      collect(
        (signal) => probe.read(signal),
        () => false,
      ),
    ).rejects.toMatchObject({
      name: 'ProbeSilentError',
      message: expect.stringMatching(/no sample for 3 s, although it answers/) as string,
    });
    expect(started).toBe(2);
  });

  test('When every line is damaged for seconds, then it is not called silent: the cable is', async () => {
    let sending: NodeJS.Timeout | undefined;
    const instrument = new ScriptedInstrument((line, self) => {
      if (line === '*IDN?') return 'Millrace,LP-1,0,1.0\n';
      if (line === 'SYSTem:ERRor?') return '0,"No error"\n';
      if (line === 'SENSe:LAMP:COUNt?') return '1\n';
      if (line === 'INITiate:CONTinuous ON') sending = setInterval(() => self.send('$12,x*00\n'), 50);
      return undefined;
    });
    const { transport } = await opened(instrument, 'P-01');
    open.push(transport);
    const probe = await openLightProbe(transport, settings);
    const reading = collect(
      (signal) => probe.read(signal),
      () => false,
    );
    await expect(reading.finally(() => clearInterval(sending))).rejects.toMatchObject({ name: 'DamagedLinesError' });
  });

  test.each(['0', '65', 'six', '1.5'])('When it says that it has %s sensors, then that is garbage', async (count) => {
    const { transport } = await opened(
      new ScriptedInstrument((line) =>
        line === '*IDN?'
          ? 'Millrace,LP-1,0,1.0\n'
          : line === 'SYSTem:ERRor?'
            ? '0,"No error"\n'
            : line === 'SENSe:LAMP:COUNt?'
              ? `${count}\n`
              : undefined,
      ),
      'P-01',
    );
    open.push(transport);
    await expect(openLightProbe(transport, settings)).rejects.toBeInstanceOf(GarbageError);
  });
});
