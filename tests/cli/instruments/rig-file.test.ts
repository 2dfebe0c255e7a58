import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterEach, beforeEach, describe, expect, test } from 'vitest';
import { loadRig, meterFor, parseRig, rangeAt } from '../../../cli/instruments/rig-file.js';
import { openRig } from '../../../cli/instruments/rig.js';
import { BadInputError } from '../../../shared/errors.js';

const RIG = `
format: refettle.rig
version: 1
name: bench-2
instruments:
  - {id: P-01, kind: light-probe, port: /dev/ttyUSB0, sensors: [lock, fill]}
  - id: M-03
    kind: meter
    port: /dev/ttyUSB1
    baudRate: 19200
    accuracy:
      resistance: {unit: ohm, ranges: [{upTo: 2, accuracy: 2%+4, resolution: 0.001}, {upTo: 600, accuracy: 0.5%+3, resolution: 0.1}]}
      capacitance: {unit: uF, accuracy: "±1% + 5 dgt", resolution: 0.01, overloadFrom: 1}
  - {id: M-09, kind: leakage-meter, port: /dev/ttyUSB2, accuracy: {current ac: {unit: mA, accuracy: 0.5%+2, resolution: 0.01}, resistance: {unit: ohm, accuracy: 1%+1, resolution: 1}}}
`;

let home: string;
beforeEach(() => {
  home = mkdtempSync(join(tmpdir(), 'refettle-rig-'));
});
afterEach(() => rmSync(home, { recursive: true, force: true }));

describe('a rig file', () => {
  test('When it is sound, then its instruments and what is left to usage are known', async () => {
    writeFileSync(join(home, 'rig.yaml'), RIG);
    const rig = await loadRig(home);
    expect(rig).toMatchObject({ name: 'bench-2', scaleMax: 1023, sampleRateHz: 100 });
    expect(meterFor(rig, 'capacitance')?.specification).toEqual({
      unit: 'uF',
      overloadFrom: 1,
      ranges: [{ accuracy: '±1% + 5 dgt', resolution: 0.01 }],
    });
  });

  test('When two instruments measure a quantity, then the first one is chosen; when none does, then none', () => {
    const rig = parseRig(RIG, 'rig.yaml');
    expect(meterFor(rig, 'resistance')?.instrument.id).toBe('M-03');
    expect(meterFor(rig, 'current ac')?.instrument.id).toBe('M-09');
    expect(meterFor(rig, 'temperature')).toBeUndefined();
  });

  test.each([
    [0, 0.001],
    [-2, 0.001],
    [2.001, 0.1],
    [5000, 0.1],
  ])('When a reading is %d ohm, then the line of the data sheet with %d applies', (value, resolution) => {
    const specification = meterFor(parseRig(RIG, 'rig.yaml'), 'resistance')?.specification;
    expect(specification && rangeAt(specification, value).resolution).toBe(resolution);
  });

  test.each([
    ['no YAML', '{', /no YAML/],
    ['another format', RIG.replace('refettle.rig', 'refettle.sheet'), /format/],
    ['another version', RIG.replace('version: 1', 'version: 2'), /version/],
    ['an instrument twice', RIG.replace('M-09', 'M-03'), /'M-03' stands twice/],
    ['an accuracy that can not be read', RIG.replace('0.5%+2', 'good'), /for example 0\.5%\+3/],
    [
      'neither ranges nor an accuracy',
      RIG.replace('unit: mA, accuracy: 0.5%+2, resolution: 0.01', 'unit: mA'),
      /either ranges, or accuracy and resolution/,
    ],
    ['a resolution of 0', RIG.replace('resolution: 0.1}', 'resolution: 0}'), /resolution/],
    ['a quantity in a foreign unit', RIG.replace('unit: uF', 'unit: V'), /capacitance is not measured in V/],
    ['a word nobody knows', RIG.replace('name: bench-2', 'name: bench-2\nbaud: 9600'), /baud/],
  ])('When it has %s, then it is refused with the file and the reason', (_what, text, reason) => {
    let refusal: unknown;
    try {
      parseRig(text, 'rig.yaml');
    } catch (error) {
      refusal = error;
    }
    expect(refusal).toBeInstanceOf(BadInputError);
    expect(refusal).toMatchObject({ file: 'rig.yaml' });
    expect((refusal as BadInputError).message).toMatch(reason);
  });

  test('When there is none, then it says where it was looked for and what else can be done', async () => {
    await expect(openRig(undefined, home)).rejects.toMatchObject({
      file: join(home, 'rig.yaml'),
      message: expect.stringContaining('sim:heron-good') as string,
    });
  });
});

describe('a real rig', () => {
  test('When it is opened, then no port is touched until an instrument is asked for', async () => {
    writeFileSync(join(home, 'rig.yaml'), RIG.replaceAll('/dev/ttyUSB', join(home, 'port-')));
    const rig = await openRig(undefined, home);
    expect(rig).toMatchObject({ name: 'bench-2', simulated: false });
    expect(rig.hands).toBeUndefined();
    expect(rig.meterInfo('resistance')).toEqual({ id: 'M-03', kind: 'meter', unit: 'ohm' });
    expect(rig.meterInfo('temperature')).toBeUndefined();
    await expect(rig.openMeterFor('resistance')).rejects.toMatchObject({ name: 'PortMissingError', instrument: 'M-03' });
    await expect(rig.openMeterFor('temperature')).rejects.toBeInstanceOf(BadInputError);
    await expect(rig.openMeterFor('resistance', 'mA')).rejects.toBeInstanceOf(BadInputError);
    await expect(rig.openProbe(['fill', 'wash'])).rejects.toThrow(/looks at the lamp 'wash'/);
    await expect(rig.openProbe(['fill'])).rejects.toMatchObject({ name: 'PortMissingError', instrument: 'P-01' });
    await rig.close();
  });

  test('When a rig file is named, then that one is taken', async () => {
    const file = join(home, 'bench-3.yaml');
    writeFileSync(file, RIG.replace('bench-2', 'bench-3'));
    expect((await openRig(file, home)).name).toBe('bench-3');
  });
});
