import { readdirSync, readFileSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { afterEach, describe, expect, test } from 'vitest';
import { runRigCheck, type Machine, type RigCheckOptions } from '../../../../cli/commands/rig/check.js';
import { parseRig } from '../../../../cli/instruments/rig-file.js';
import { SimulatedMeter } from '../../../../cli/instruments/simulated/simulated-meter.js';
import { plugIn, type SimulatedInstrument } from '../../../../cli/instruments/simulated/simulated-port.js';
import { SimulatedProbe } from '../../../../cli/instruments/simulated/simulated-probe.js';
import type { Binding } from '../../../../cli/instruments/transport.js';
import { runProgram } from '../../../../cli/program.js';
import { benchTerminal, type BenchTerminal } from '../../../helpers/bench-terminal.js';
import { heron } from '../../../helpers/unit-facts.js';

const SHEET = 'server/seed/shop/heron-h6.yaml';
let bench: BenchTerminal;
afterEach(() => bench.remove());

const meter = (identification: string): SimulatedInstrument => new SimulatedMeter(identification, () => 5, { unplug: () => undefined });
/** Room light on every sensor but the covered one. */
function probe(covered: () => number | undefined = () => undefined): SimulatedInstrument {
  const source = function* () {
    for (let index = 0; ; index += 1)
      yield { tUs: index * 10_000, levels: [0, 1, 2, 3, 4, 5].map((sensor) => (sensor === covered() ? 20 : 400)) };
  };
  return new SimulatedProbe({ identification: 'Millrace,LP-6,1,1.0', sensorCount: 6, source, speed: 1 });
}
const silent: SimulatedInstrument = { connect: () => undefined, receive: () => undefined, disconnect: () => undefined };

let machines = 0;
/** A machine with an instrument on each of these ports. `refused`: what the driver says when such a port is opened. */
async function machineWith(
  plugs: Record<string, SimulatedInstrument>,
  refused: Record<string, string> = {},
): Promise<{ machine: Machine; at: (name: string) => string }> {
  const folder = `/sim/machine-${(machines += 1)}`;
  const at = (name: string): string => `${folder}/${name}`;
  const { binding } = await plugIn(Object.entries(plugs).map(([name, instrument]) => ({ path: at(name), instrument })));
  const failing = {
    ...binding,
    open: (options: { path: string }) => {
      const words = Object.entries(refused).find(([name]) => at(name) === options.path)?.[1];
      return words === undefined ? binding.open(options as never) : Promise.reject(new Error(words));
    },
  } as unknown as Binding;
  const names = [...Object.keys(plugs), ...Object.keys(refused)];
  return {
    at,
    machine: {
      binding: failing,
      askTimeoutMs: 60,
      ports: () => Promise.resolve(names.map((name) => ({ path: at(name), device: at(name) }))),
    },
  };
}

const rigFile = (): string => join(bench.home, 'rig.yaml');
const written = () => parseRig(readFileSync(rigFile(), 'utf8'), 'rig.yaml');
const rigYaml = (at: (name: string) => string, meterPort: string): string => `
format: refettle.rig
version: 1
name: bench-2
instruments:
  - {id: P-01, kind: light-probe, port: ${at('a')}, identification: 'Millrace,LP-6,1,1.0', sensors: [fill, wash, rinse, drain, spin, lock]}
  - {id: M-03, kind: meter, port: ${meterPort}, identification: 'Millrace,BM-4,3,1.0', accuracy: {resistance: {unit: ohm, accuracy: 1%+1, resolution: 1}}}
`;
/** Serial number 0: "not available" (IEEE 488.2, 10.14). */
const NAMELESS = 'Millrace,BM-4,0,1.0';
const twoOfOneModel = (at: (name: string) => string): string => `
format: refettle.rig
version: 1
name: bench-2
instruments:
  - {id: M-01, kind: meter, port: ${at('a')}, identification: '${NAMELESS}', accuracy: {resistance: {unit: ohm, accuracy: 1%+1, resolution: 1}}}
  - {id: M-02, kind: meter, port: ${at('b')}, identification: '${NAMELESS}', accuracy: {resistance: {unit: ohm, accuracy: 2%+1, resolution: 1}}}
`;
const check = (options: RigCheckOptions, machine: Machine) => runRigCheck(options, bench.context, machine);
const json = () => JSON.parse(bench.stdout()) as Record<string, unknown>;

describe('In a pipe', () => {
  test('When there is no rig file, then each port says what it answered or why not, and nothing is written', async () => {
    bench = benchTerminal();
    const { machine, at } = await machineWith(
      { a: probe(), b: meter('Millrace,BM-4,3,1.0'), c: silent },
      { d: 'Error: Permission denied, cannot open', e: 'Error Resource temporarily unavailable Cannot lock port' },
    );
    expect(await check({}, machine)).toBe(1);
    const said = bench.stdout();
    expect(said).toContain(`${at('a')}\n  Millrace,LP-6,1,1.0, 6 sensors, 115200 baud\n  new\n`);
    expect(said).toContain(`${at('b')}\n  Millrace,BM-4,3,1.0, `);
    expect(said).toContain(`${at('c')}\n  silent: nothing answers to *IDN? (tried at 115200 and 9600 baud)`);
    expect(said).toContain(
      `${at('d')}\n  no permission: you may not use the port: it belongs to the group 'dialout'\n  Run 'sudo usermod -aG dialout`,
    );
    expect(said).toContain(`${at('e')}\n  in use: another program has the port`);
    expect(bench.stderr()).toContain('Nothing was written. To let the rig file follow: refettle rig check --write');
    expect(readdirSync(bench.home)).not.toContain('rig.yaml');
  });

  test('When told to write, then the rig file holds what answered, and can be read', async () => {
    bench = benchTerminal();
    const { machine, at } = await machineWith({ a: probe(), b: meter('Millrace,BM-4,3,1.0') });
    expect(await check({ write: true, name: 'bench-7' }, machine)).toBe(0);
    expect(written()).toMatchObject({
      name: 'bench-7',
      instruments: [
        { id: 'P-01', kind: 'light-probe', port: at('a'), identification: 'Millrace,LP-6,1,1.0' },
        { id: 'M-01', kind: 'meter', port: at('b'), identification: 'Millrace,BM-4,3,1.0', accuracy: {} },
      ],
    });
    expect(bench.stdout()).toContain(`Written: ${rigFile()}.`);
  });

  test('When the plugs are swapped, then it says so, and with --write the file follows and the old one is kept', async () => {
    bench = benchTerminal();
    const { machine, at } = await machineWith({ a: meter('Millrace,BM-4,3,1.2'), b: probe() });
    const old = rigYaml(at, at('b'));
    writeFileSync(rigFile(), old);
    expect(await check({}, machine)).toBe(1);
    expect(bench.stdout()).toContain(`M-03, which the rig file has on ${at('b')}`);
    expect(readFileSync(rigFile(), 'utf8')).toBe(old);
    expect(await check({ write: true }, machine)).toBe(0);
    expect(written().instruments).toMatchObject([
      { id: 'P-01', port: at('b'), sensors: ['fill', 'wash', 'rinse', 'drain', 'spin', 'lock'] },
      { id: 'M-03', port: at('a'), identification: 'Millrace,BM-4,3,1.2', accuracy: { resistance: { unit: 'ohm' } } },
    ]);
    const backup = readdirSync(bench.home).find((name) => /^rig\.\d{4}-.*\.yaml$/.test(name));
    expect(backup && readFileSync(join(bench.home, backup), 'utf8')).toBe(old);
  });

  test('When everything is as written, then it is good and nothing changes', async () => {
    bench = benchTerminal();
    const { machine, at } = await machineWith({ a: probe(), b: meter('Millrace,BM-4,3,1.0') });
    writeFileSync(rigFile(), rigYaml(at, at('b')));
    // The mock answers at any speed, so a meter is met at the first one that is tried: that of the rig file.
    expect(await check({ write: true }, machine)).toBe(0);
    expect(bench.stdout()).toContain(`${rigFile()} says it as it is.`);
    expect(readdirSync(bench.home)).toEqual(['rig.yaml']);
  });

  test('When what answers may be one of two, then nothing is written, and it says which', async () => {
    bench = benchTerminal();
    const { machine, at } = await machineWith({ c: meter(NAMELESS) });
    const old = twoOfOneModel(at);
    writeFileSync(rigFile(), old);
    expect(await check({ write: true }, machine)).toBe(1);
    expect(bench.stdout()).toContain('may be M-01 or M-02');
    expect(bench.stderr()).toContain(`Nothing was written: what answers on ${at('c')} may be M-01 or M-02.`);
    expect(readFileSync(rigFile(), 'utf8')).toBe(old);
  });

  test('When answers about sensors get lost or come damaged, then a probe is a probe all the same', async () => {
    bench = benchTerminal();
    const inner = probe();
    // Lost, right, damaged, right.
    const asked = ['lost', 'right', 'damaged', 'right'];
    const { machine } = await machineWith({
      a: {
        connect: (send) => inner.connect((text) => send(text === '6\n' && asked.shift() === 'damaged' ? '\u0016\n' : text)),
        receive: (line) => (line.startsWith('SENS') && asked[0] === 'lost' ? void asked.shift() : inner.receive(line)),
        disconnect: () => inner.disconnect(),
      },
    });
    expect(await check({ json: true }, machine)).toBe(1);
    expect(json()).toMatchObject({ instruments: [{ id: 'P-01', kind: 'light-probe' }] });
  });

  test('When something says who it is and nothing about sensors, then it is taken for neither meter nor probe', async () => {
    bench = benchTerminal();
    const inner = meter('Millrace,BM-4,3,1.0');
    const { machine } = await machineWith({
      b: {
        connect: (send) => inner.connect(send),
        receive: (line) => (line.startsWith('SENS') ? undefined : inner.receive(line)),
        disconnect: () => inner.disconnect(),
      },
    });
    expect(await check({ json: true }, machine)).toBe(4);
    expect(json()).toMatchObject({
      ports: [{ state: 'makes no sense', why: expect.stringContaining('whether it is a probe or a meter') as string }],
    });
  });

  test('When an instrument of the rig answers nowhere, then it is named, stays in the file, and the exit code is 4', async () => {
    bench = benchTerminal();
    const { machine, at } = await machineWith({ a: probe() });
    writeFileSync(rigFile(), rigYaml(at, at('b')));
    expect(await check({ write: true }, machine)).toBe(4);
    expect(bench.stdout()).toContain(`M-03 (meter) answers nowhere; the rig file has it on ${at('b')} as Millrace,BM-4,3,1.0`);
    expect(written().instruments).toHaveLength(2);
  });

  test('When the machine has no port at all, then it says so, with 4', async () => {
    bench = benchTerminal();
    expect(await check({}, { ports: () => Promise.resolve([]) })).toBe(4);
    expect(bench.stdout()).toContain('This machine has no serial port');
    expect(bench.stderr()).toContain('No instrument answered on any port.');
  });

  test('When a probe is sending already, then it is stopped and asked', async () => {
    bench = benchTerminal();
    const running = probe();
    running.receive('INITiate:CONTinuous ON');
    const { machine } = await machineWith({ a: running });
    expect(await check({ json: true }, machine)).toBe(1);
    expect(json()).toMatchObject({ ports: [{ state: 'answers', sensorCount: 6 }] });
  });

  test('When ports are named, then only those are asked', async () => {
    bench = benchTerminal();
    const { machine, at } = await machineWith({ a: probe(), b: meter('Millrace,BM-4,3,1.0') });
    await check({ port: [at('b'), at('z')], json: true }, machine);
    expect(json()).toMatchObject({
      ports: [
        { port: at('b'), state: 'answers' },
        { port: at('z'), state: 'not there' },
      ],
    });
  });
});

describe('In JSON', () => {
  test('When it is asked for, then one line says everything, with what would be written', async () => {
    bench = benchTerminal();
    const { machine, at } = await machineWith({ a: probe(), b: meter('Millrace,BM-4,9,1.0') });
    writeFileSync(rigFile(), rigYaml(at, at('b')));
    expect(await check({ json: true }, machine)).toBe(4);
    expect(bench.stdout().trim().split('\n')).toHaveLength(1);
    expect(json()).toMatchObject({
      ports: [{ port: at('a') }, { port: at('b') }],
      instruments: [
        { id: 'P-01', standing: 'as written' },
        { id: 'M-01', standing: 'new' },
      ],
      missing: [{ id: 'M-03' }],
      rigFile: rigFile(),
      differs: true,
      written: false,
      proposal: expect.stringContaining('format: refettle.rig') as string,
    });
  });
});

describe('At a terminal', () => {
  test('When the sensors are covered in panel order, then the order that is found is written down', async () => {
    bench = benchTerminal({ terminal: true });
    // Sensors 1 and 2 hang on each other's lamps.
    const order = ['wash', 'fill', 'rinse', 'drain', 'spin', 'lock'];
    const covered = (): number | undefined => {
      const label = [...bench.stderr().matchAll(/Cover the sensor on (\w+)/g)].at(-1)?.[1];
      const lamp = heron.lamps.find((one) => one.label === label);
      return lamp === undefined ? undefined : order.indexOf(lamp.id);
    };
    const { machine, at } = await machineWith({ a: probe(covered), b: meter('Millrace,BM-4,3,1.0') });
    writeFileSync(rigFile(), rigYaml(at, at('b')));
    bench.when('with a hand?', 'y');
    for (const { label } of heron.lamps) bench.when(`Cover the sensor on ${label}`, ' ');
    bench.when('keep the accuracies', 'y').when('Write this to', 'y');
    expect(await check({ sheet: SHEET }, machine)).toBe(0);
    expect(bench.stderr()).toContain('Sensor 2 looks at Fill.');
    expect(written().instruments[0]).toMatchObject({ id: 'P-01', sensors: order });
    expect(bench.raw()).toBe(0);
  });

  test('When a sensor is covered twice, or none, then it is asked again', async () => {
    bench = benchTerminal({ terminal: true });
    let asks = 0;
    const hand = [undefined, 0, 0, 1, 2, 3, 4, 5];
    const covered = (): number | undefined => {
      asks = [...bench.stderr().matchAll(/Cover the sensor on/g)].length;
      return asks === 0 ? undefined : hand[asks - 1];
    };
    const { machine } = await machineWith({ a: probe(covered) });
    bench.when('with a hand?', 'y');
    for (let time = 0; time < hand.length; time += 1) bench.when('keep it covered', ' ');
    bench.when('Write this to', 'n');
    expect(await check({ sheet: SHEET }, machine)).toBe(1);
    expect(bench.stderr()).toContain('No sensor changed clearly');
    expect(bench.stderr()).toContain('That is sensor 1, which looks at Fill.');
    expect(bench.stderr()).toContain('sensors:');
    expect(readdirSync(bench.home)).toEqual([]);
  });

  test('When a meter is new, then its accuracy is asked as its manual prints it', async () => {
    bench = benchTerminal({ terminal: true });
    const { machine, at } = await machineWith({ b: meter('Millrace,BM-4,3,1.0') });
    bench
      .when('What the shop calls it', '\r')
      .when('What it is', '\r')
      .when('Which function', '\r')
      .when('in which unit', '\r')
      .when('End of the range', '600\r')
      .when('Its accuracy (like', '0.5%+3\r')
      .when('Value of its last digit', '0.1\r')
      .when('End of the range', '\r')
      .when('Its accuracy (like', '1%+5\r')
      .when('Value of its last digit', '10\r')
      // Six functions less the one that is told: the last choice is "no more".
      .when('Which function', '\u001b[A\r')
      .when('Write this to', 'y');
    expect(await check({}, machine)).toBe(0);
    expect(written().instruments).toEqual([
      {
        id: 'M-01',
        kind: 'meter',
        port: at('b'),
        identification: 'Millrace,BM-4,3,1.0',
        baudRate: 115_200,
        accuracy: {
          resistance: {
            unit: 'ohm',
            ranges: [
              { upTo: 600, accuracy: '0.5%+3', resolution: 0.1 },
              { accuracy: '1%+5', resolution: 10 },
            ],
          },
        },
      },
    ]);
  });

  test('When what answers may be one of two, then the technician says which', async () => {
    bench = benchTerminal({ terminal: true });
    const { machine, at } = await machineWith({ c: meter(NAMELESS) });
    writeFileSync(rigFile(), twoOfOneModel(at));
    // The second of the two, and "none of these".
    bench
      .when(`Which one is on ${at('c')}?`, '\u001b[B\r')
      .when('keep the accuracies', 'y')
      .when('Write this to', 'y');
    expect(await check({}, machine)).toBe(4);
    expect(written().instruments).toMatchObject([
      { id: 'M-01', port: at('a') },
      { id: 'M-02', port: at('c') },
    ]);
  });

  test('When a new meter is given the name of another, then that is refused while it is typed', async () => {
    bench = benchTerminal({ terminal: true });
    const { machine, at } = await machineWith({ b: meter('Millrace,BM-4,4,1.0') });
    writeFileSync(rigFile(), rigYaml(at, at('c')));
    bench
      .when('What the shop calls it', 'M-03\r')
      .when('M-03 is the name of another instrument', '\u007f4\r')
      .when('What it is', '\r')
      .when('Which function', '\u001b[A\r')
      .when('Write this to', 'y');
    expect(await check({}, machine)).toBe(4);
    expect(written().instruments.map(({ id }) => id)).toEqual(['P-01', 'M-03', 'M-04']);
  });

  test('When the technician leaves, then nothing is written', async () => {
    bench = benchTerminal({ terminal: true });
    const { machine } = await machineWith({ a: probe() });
    bench.when('with a hand?', 'y').when('keep it covered', 'q');
    await expect(check({ sheet: SHEET }, machine)).rejects.toMatchObject({ name: 'StoppedError' });
    expect(readdirSync(bench.home)).toEqual([]);
  });
});

test('When a simulated rig is to be checked, or two panels are given, then that is wrong usage', async () => {
  bench = benchTerminal();
  expect(await runProgram(['rig', 'check', '--rig', 'sim:heron-good'], bench.context)).toBe(2);
  expect(await runProgram(['rig', 'check', '--sheet', SHEET, '--family', 'heron-h6'], bench.context)).toBe(2);
});

describe('rig show', () => {
  test('When a rig is shown, then it is as understood, in text and in JSON', async () => {
    bench = benchTerminal();
    writeFileSync(
      rigFile(),
      rigYaml((name) => `/dev/tty${name}`, '/dev/ttyb'),
    );
    expect(await runProgram(['rig', 'show'], bench.context)).toBe(0);
    expect(bench.stdout()).toBe(`bench-2  100 samples a second, full scale 1023, unplugged instruments are waited for 60 s

P-01  light probe
  /dev/ttya, 115200 baud
  Millrace,LP-6,1,1.0
  sensors: fill, wash, rinse, drain, spin, lock

M-03  meter
  /dev/ttyb, 9600 baud
  Millrace,BM-4,3,1.0
  resistance: ±(1%+1), last digit 1 ohm
`);
    const before = bench.stdout().length;
    expect(await runProgram(['rig', 'show', '--json'], bench.context)).toBe(0);
    expect(JSON.parse(bench.stdout().slice(before))).toMatchObject({
      file: rigFile(),
      simulated: false,
      name: 'bench-2',
      instruments: [
        { id: 'P-01', baudRate: 115_200 },
        { id: 'M-03', baudRate: 9600 },
      ],
    });
  });

  test('When a simulated rig is shown, then its invented instruments are listed; when there is no rig file, then it says how to get one', async () => {
    bench = benchTerminal({ stdoutTerminal: true });
    expect(await runProgram(['rig', 'show', '--rig', 'sim:heron-good'], bench.context)).toBe(0);
    expect(bench.stdout()).toContain('Millrace,IT-1,SIM0005,1.0');
    expect(await runProgram(['rig', 'show'], bench.context)).toBe(3);
    expect(bench.stderr()).toContain('refettle rig check');
  });
});
