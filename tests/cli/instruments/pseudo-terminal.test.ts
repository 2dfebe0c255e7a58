import { spawn, type ChildProcess } from 'node:child_process';
import { once } from 'node:events';
import { existsSync, mkdirSync, mkdtempSync, readdirSync, realpathSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { setTimeout as sleep } from 'node:timers/promises';
import { afterEach, beforeEach, expect, test } from 'vitest';
import { askPort } from '../../../cli/instruments/ask-port.js';
import { assembleRig } from '../../../cli/instruments/assemble-rig.js';
import { DisconnectedError, PortBusyError, PortMissingError } from '../../../cli/instruments/instrument-error.js';
import { openLightProbe } from '../../../cli/instruments/light-probe.js';
import { openMeter } from '../../../cli/instruments/meter.js';
import { parseRig } from '../../../cli/instruments/rig-file.js';
import type { OpenRig, ProbeEvent } from '../../../cli/instruments/rig.js';
import { SimulatedMeter, type Measured } from '../../../cli/instruments/simulated/simulated-meter.js';
import type { SimulatedInstrument } from '../../../cli/instruments/simulated/simulated-port.js';
import { SimulatedProbe } from '../../../cli/instruments/simulated/simulated-probe.js';
import { openTransport, type Transport } from '../../../cli/instruments/transport.js';

// The true serial driver on a pseudo-terminal: the simulators hang on its far end. A pty enforces neither speed nor parity.
/** An idle port takes less than the clock can tell apart. */
const LEAST_IDLE_MS = 5;

let folder: string;
let host: string;
let device: string;
let socat: ChildProcess;
let open: Transport[] = [];

beforeEach(async () => {
  folder = mkdtempSync(join(tmpdir(), 'refettle-pty-'));
  host = join(folder, 'host');
  device = join(folder, 'device');
  await plugInAgain();
});
afterEach(async () => {
  await Promise.all(open.map((transport) => transport.close()));
  open = [];
  await unplug();
  rmSync(folder, { recursive: true, force: true });
});

/** The cable goes in: both ends of the pair are there. */
async function plugInAgain(): Promise<void> {
  socat = spawn('socat', [`pty,raw,echo=0,link=${host}`, `pty,raw,echo=0,link=${device}`], { stdio: 'ignore' });
  while (!existsSync(host) || !existsSync(device)) await sleep(5);
}

/** What pulling the cable is to a pseudo-terminal: the pair is gone. */
async function unplug(): Promise<void> {
  if (socat.exitCode !== null || socat.signalCode !== null) return;
  const ended = once(socat, 'exit');
  socat.kill();
  await ended;
}

async function port(path: string, instrument: string): Promise<Transport> {
  const transport = await openTransport({ instrument, path, baudRate: 115_200 });
  open.push(transport);
  return transport;
}

async function hang(instrument: SimulatedInstrument): Promise<void> {
  const far = await port(device, 'simulator');
  // The transport ends each line itself; the instrument's own line ends are taken off for it.
  instrument.connect((text) =>
    text
      .split('\n')
      .filter((line) => line !== '')
      .forEach((line) => void far.write(line).catch(() => undefined)),
  );
  far.onLine((line) => instrument.receive(line));
  far.onClose(() => instrument.disconnect());
}

test('When a meter hangs on a true port, then it is asked and read through the true driver', async () => {
  const measures: Measured[] = Array.from({ length: 50 }, (_unused, index) => index / 10);
  await hang(new SimulatedMeter('Millrace,BM-4,0,1.0', () => measures.shift() ?? 'overload', { unplug: () => undefined }));
  const meter = await openMeter(await port(host, 'M-03'));
  expect(meter.identification).toBe('Millrace,BM-4,0,1.0');
  for (let index = 0; index < 50; index += 1) expect((await meter.measure('resistance')).value).toBe(index / 10);
});

test('When a probe hangs on a true port, then no sample is lost at twenty times its rate', async () => {
  const source = function* () {
    for (let index = 0; index < 60_000; index += 1) yield { tUs: index * 10_000, levels: [index % 1024, 1, 2, 3, 4, 5] };
  };
  await hang(new SimulatedProbe({ identification: 'Millrace,LP-6,0,1.0', sensorCount: 6, source, speed: 20 }));
  const probe = await openLightProbe(await port(host, 'P-01'), {
    sampleRateHz: 100,
    scaleMax: 1023,
    nowUs: () => performance.now() * 1000,
  });
  const stop = new AbortController();
  let samples = 0;
  for await (const event of probe.read(stop.signal)) {
    expect(event).toEqual({ kind: 'sample', tUs: samples * 10_000, levels: [samples % 1024, 1, 2, 3, 4, 5] });
    samples += 1;
    if (samples === 2000) stop.abort();
  }
  expect(samples).toBeGreaterThanOrEqual(2000);
});

test('When the port vanishes while an answer is awaited, then it is noticed at once', async () => {
  await hang(new SimulatedMeter('Millrace,BM-4,0,1.0', () => 'timeout', { unplug: () => undefined }));
  const meter = await openMeter(await port(host, 'M-03'), { measureTimeoutMs: 20_000 });
  const measuring = meter.measure('resistance');
  const outcome = expect(measuring).rejects.toBeInstanceOf(DisconnectedError);
  await sleep(50);
  await unplug();
  await outcome;
});

test('When the port vanishes right after it was opened, then it is noticed too', async () => {
  // Just after opening, the driver's first read meets the hang-up: without the mended read it would spin and never say so.
  const transport = await openTransport({ instrument: 'M-03', path: host, baudRate: 9600 });
  const gone = new Promise((resolve) => transport.onClose(resolve));
  await unplug();
  expect(await gone).toBeInstanceOf(DisconnectedError);
});

/** How much processor time this process takes while it does nothing but wait, in milliseconds. */
async function processorMs(waitMs: number): Promise<number> {
  const before = process.cpuUsage();
  await sleep(waitMs);
  const { user, system } = process.cpuUsage(before);
  return (user + system) / 1000;
}

test('When the port vanishes, then waiting costs no more than it does with an idle port', async () => {
  // The driver is known to read in a circle when its first read after opening meets the hang-up: it then takes most of a core.
  const first = await openTransport({ instrument: 'M-03', path: host, baudRate: 9600 });
  const idle = Math.max(await processorMs(500), LEAST_IDLE_MS);
  await first.close();
  const transport = await openTransport({ instrument: 'M-03', path: host, baudRate: 9600 });
  const gone = new Promise((resolve) => transport.onClose(resolve));
  await unplug();
  await gone;
  expect((await processorMs(500)) / idle).toBeLessThan(8);
});

/** A rig with one meter and one probe on the pair, that waits for what is unplugged. */
function patientRig(): { rig: OpenRig; said: string[] } {
  const said: string[] = [];
  const rig = assembleRig(
    parseRig(
      `{format: refettle.rig, version: 1, name: pty, reconnectSeconds: 20, instruments: [
        {id: P-01, kind: light-probe, port: "${host}", sensors: [fill, wash]},
        {id: M-03, kind: meter, port: "${host}", baudRate: 115200, accuracy: {resistance: {unit: ohm, accuracy: 1%+1, resolution: 1}}}]}`,
      'rig.yaml',
    ),
    { tryEveryMs: 50, measureTimeoutMs: 20_000 },
    { say: (line) => said.push(line), signal: new AbortController().signal },
  );
  return { rig, said };
}

test('When the meter is unplugged in a measurement and plugged in again, then it is asked again through the true driver', async () => {
  const meterSaying = (measured: Measured) => new SimulatedMeter('Millrace,BM-4,0,1.0', () => measured, { unplug: () => undefined });
  await hang(meterSaying('timeout'));
  const { rig, said } = patientRig();
  const measuring = (await rig.openMeterFor('resistance')).measure();
  await sleep(100);
  await unplug();
  await sleep(300);
  await plugInAgain();
  await hang(meterSaying(26.8));
  expect(await measuring).toBe(26.8);
  expect(said).toHaveLength(2);
  expect(said[1]).toMatch(/^M-03 is back after \d+ s; the measurement is asked for again\.$/);
  await rig.close();
});

test('When the probe is unplugged in a capture and plugged in again with a clock that begins anew, then the capture goes on with a gap', async () => {
  const counting = function* () {
    for (let index = 0; ; index += 1) yield { tUs: index * 10_000, levels: [index % 1024, 1] };
  };
  const probeFrom = (clockStartUs: number) =>
    new SimulatedProbe({ identification: 'Millrace,LP-2,0,1.0', sensorCount: 2, source: counting, speed: 1, clockStartUs });
  await hang(probeFrom(80_000_000));
  const { rig, said } = patientRig();
  const probe = await rig.openProbe(['fill', 'wash']);
  const stop = new AbortController();
  const events: ProbeEvent[] = [];
  let samples = 0;
  for await (const event of probe.read(stop.signal)) {
    events.push(event);
    if (event.kind === 'sample') samples += 1;
    if (samples === 40 && event.kind === 'sample') {
      await unplug();
      await sleep(400);
      await plugInAgain();
      await hang(probeFrom(5));
    }
    if (samples === 80) stop.abort();
  }
  const lost = events.reduce((sum, event) => sum + (event.kind === 'gap' ? event.lost : 0), 0);
  const times = events.filter((event) => event.kind === 'sample').map(({ tUs }) => tUs);
  // At least the 400 ms that the plug was out, at 100 Hz.
  expect(lost).toBeGreaterThanOrEqual(38);
  expect(times.every((time, index) => index === 0 || time > (times[index - 1] ?? 0))).toBe(true);
  expect((times.at(-1) ?? 0) / 10_000).toBeCloseTo(times.length + lost - 1, -1);
  expect(said.at(-1)).toMatch(/the recording goes on, with a gap/);
  await rig.close();
});

test('When half a line comes over the true port, then it is no reading', async () => {
  const far = await port(device, 'simulator');
  far.onLine((line) => {
    if (line === 'SYSTem:ERRor?') void far.write('0,"No error"');
    else if (line === '*IDN?') void far.write('Millrace,BM-4,0,1.0');
    // Past the transport, which would end the line.
    else writeFileSync(device, '+9.6');
  });
  const meter = await openMeter(await port(host, 'M-03'), { measureTimeoutMs: 100 });
  await expect(meter.measure('resistance')).rejects.toMatchObject({ name: 'HalfAnswerError', answer: '+9.6' });
});

test('When another program has locked the port, then that program is named', async () => {
  const other = spawn('flock', ['--exclusive', '--no-fork', host, 'sleep', '30'], { stdio: 'ignore' });
  try {
    let error: unknown;
    for (let attempt = 0; attempt < 100 && error === undefined; attempt += 1) {
      await sleep(20);
      error = await openTransport({ instrument: 'M-03', path: host, baudRate: 9600 }).then(
        (transport) => void transport.close(),
        (reason: unknown) => reason,
      );
    }
    expect(error).toBeInstanceOf(PortBusyError);
    expect((error as PortBusyError).message).toMatch(new RegExp(`the port is held by '(flock|sleep)' \\(process ${other.pid}\\)$`));
  } finally {
    const ended = once(other, 'exit');
    other.kill();
    await ended;
  }
});

test('When a port is open, then a lock file tells other programs, and it goes with the port', async () => {
  const lockFolder = join(folder, 'locks');
  mkdirSync(lockFolder);
  const transport = await openTransport({ instrument: 'M-03', path: host, baudRate: 9600, lockFolder });
  expect(readdirSync(lockFolder)).toEqual([`LCK..${realpathSync(host).slice('/dev/'.length).replaceAll('/', '_')}`]);
  await transport.close();
  expect(readdirSync(lockFolder)).toEqual([]);
  const second = await openTransport({ instrument: 'M-03', path: host, baudRate: 9600, lockFolder });
  await unplug();
  await new Promise((resolve) => second.onClose(resolve));
  expect(readdirSync(lockFolder)).toEqual([]);
});

test('When the ports of the machine are asked over the true driver, then each says what it is', async () => {
  await hang(new SimulatedMeter('Millrace,BM-4,0,1.0', () => 5, { unplug: () => undefined }));
  expect(await askPort(host, { baudRates: [115_200, 9600], timeoutMs: 2000 })).toEqual({
    port: host,
    state: 'answers',
    baudRate: 115_200,
    identification: 'Millrace,BM-4,0,1.0',
  });
  expect(await askPort(join(folder, 'none'), { baudRates: [9600] })).toMatchObject({ state: 'not there' });
});

test('When the port is open in another place, then it is busy', async () => {
  await port(host, 'M-03');
  await expect(openTransport({ instrument: 'M-03', path: host, baudRate: 9600 })).rejects.toBeInstanceOf(PortBusyError);
});

test('When the port is not there, then it is missing', async () => {
  await expect(openTransport({ instrument: 'M-03', path: join(folder, 'none'), baudRate: 9600 })).rejects.toBeInstanceOf(PortMissingError);
});
