import { spawn, type ChildProcess } from 'node:child_process';
import { once } from 'node:events';
import { existsSync, mkdtempSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { setTimeout as sleep } from 'node:timers/promises';
import { afterEach, beforeEach, expect, test } from 'vitest';
import { DisconnectedError, PortBusyError, PortMissingError } from '../../../cli/instruments/instrument-error.js';
import { openLightProbe } from '../../../cli/instruments/light-probe.js';
import { openMeter } from '../../../cli/instruments/meter.js';
import { SimulatedMeter, type Measured } from '../../../cli/instruments/simulated/simulated-meter.js';
import type { SimulatedInstrument } from '../../../cli/instruments/simulated/simulated-port.js';
import { SimulatedProbe } from '../../../cli/instruments/simulated/simulated-probe.js';
import { openTransport, type Transport } from '../../../cli/instruments/transport.js';

// The true serial driver on a pseudo-terminal: the simulators hang on its far end. A pty enforces neither speed nor parity.
let folder: string;
let host: string;
let device: string;
let socat: ChildProcess;
let open: Transport[] = [];

beforeEach(async () => {
  folder = mkdtempSync(join(tmpdir(), 'refettle-pty-'));
  host = join(folder, 'host');
  device = join(folder, 'device');
  socat = spawn('socat', [`pty,raw,echo=0,link=${host}`, `pty,raw,echo=0,link=${device}`], { stdio: 'ignore' });
  while (!existsSync(host) || !existsSync(device)) await sleep(5);
});
afterEach(async () => {
  await Promise.all(open.map((transport) => transport.close()));
  open = [];
  await unplug();
  rmSync(folder, { recursive: true, force: true });
});

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

test('When the port is open in another place, then it is busy', async () => {
  await port(host, 'M-03');
  await expect(openTransport({ instrument: 'M-03', path: host, baudRate: 9600 })).rejects.toBeInstanceOf(PortBusyError);
});

test('When the port is not there, then it is missing', async () => {
  await expect(openTransport({ instrument: 'M-03', path: join(folder, 'none'), baudRate: 9600 })).rejects.toBeInstanceOf(PortMissingError);
});
