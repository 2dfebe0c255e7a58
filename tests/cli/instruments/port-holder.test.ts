import { spawn, spawnSync } from 'node:child_process';
import { mkdirSync, mkdtempSync, readFileSync, readdirSync, rmSync, symlinkSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterEach, beforeEach, describe, expect, test } from 'vitest';
import { machinePorts } from '../../../cli/instruments/machine-ports.js';
import { holderOf, holderText, lockFileHolder, takeLockFile } from '../../../cli/instruments/port-holder.js';

let folder: string;
beforeEach(() => {
  folder = mkdtempSync(join(tmpdir(), 'refettle-ports-'));
});
afterEach(() => rmSync(folder, { recursive: true, force: true }));

/** A process number that is nobody's: that of a program that has ended. */
const endedProcess = (): number => spawnSync('true').pid;

describe('a lock file', () => {
  test('When a port is taken, then the file stands in the old manner, and is gone when the port is given back', () => {
    const giveBack = takeLockFile('/dev/ttyUSB0', folder);
    // Filesystem Hierarchy Standard 3.0, 5.9: LCK.. and the device; the process number as ten characters, with a line end.
    expect(readdirSync(folder)).toEqual(['LCK..ttyUSB0']);
    expect(readFileSync(join(folder, 'LCK..ttyUSB0'), 'utf8')).toBe(`${String(process.pid).padStart(10)}\n`);
    expect(lockFileHolder('/dev/ttyUSB0', folder)).toBeUndefined();
    giveBack();
    expect(readdirSync(folder)).toEqual([]);
  });

  test('When a living program has it, then that program is named, and its file is left alone', () => {
    const other = spawn('sleep', ['30'], { stdio: 'ignore' });
    try {
      writeFileSync(join(folder, 'LCK..ttyACM1'), `${String(other.pid).padStart(10)}\n`);
      expect(lockFileHolder('/dev/ttyACM1', folder)).toBe(other.pid);
      const holder = holderOf('/dev/ttyACM1', folder);
      expect(holder && holderText(holder)).toBe(`'sleep' (process ${other.pid})`);
      takeLockFile('/dev/ttyACM1', folder)();
      expect(readdirSync(folder)).toEqual(['LCK..ttyACM1']);
    } finally {
      other.kill();
    }
  });

  test('When the program that wrote it is gone, then it counts for nothing and is replaced', () => {
    writeFileSync(join(folder, 'LCK..ttyUSB3'), `${String(endedProcess()).padStart(10)}\n`);
    expect(lockFileHolder('/dev/ttyUSB3', folder)).toBeUndefined();
    const giveBack = takeLockFile('/dev/ttyUSB3', folder);
    expect(readFileSync(join(folder, 'LCK..ttyUSB3'), 'utf8').trim()).toBe(String(process.pid));
    giveBack();
  });

  test.each(['', 'nobody', '-1', '\0\0\0\0'])('When it holds %j, then it is nobody’s', (text) => {
    writeFileSync(join(folder, 'LCK..ttyUSB0'), text);
    expect(lockFileHolder('/dev/ttyUSB0', folder)).toBeUndefined();
  });

  test('When such files may not be written there, then the port is taken all the same', () => {
    expect(() => takeLockFile('/dev/ttyUSB0', join(folder, 'none'))()).not.toThrow();
  });
});

describe('the ports of a machine', () => {
  const absent = () => Promise.reject(new Error('spawn udevadm ENOENT'));
  const device = (name: string): void => writeFileSync(join(folder, name), '');

  test('When udev is absent, then the plugged-in ports are found in /dev, each once, under its stable name', async () => {
    ['ttyUSB0', 'ttyUSB10', 'ttyUSB2', 'ttyACM0', 'ttyS0', 'tty1', 'null'].forEach(device);
    mkdirSync(join(folder, 'serial', 'by-id'), { recursive: true });
    symlinkSync('../../ttyUSB2', join(folder, 'serial', 'by-id', 'usb-Millrace_BM-4_7-if00-port0'));
    const ports = await machinePorts({ deviceFolder: folder, list: absent });
    expect(ports.map(({ path }) => path.slice(folder.length + 1))).toEqual([
      'serial/by-id/usb-Millrace_BM-4_7-if00-port0',
      'ttyACM0',
      'ttyUSB0',
      'ttyUSB10',
    ]);
    expect(ports[0]?.device).toBe(join(folder, 'ttyUSB2'));
  });

  test('When the system has a list, then a fixed port that something is known of is named, and makers are told', async () => {
    ['ttyUSB0', 'ttyS0', 'ttyS1'].forEach(device);
    const list = () =>
      Promise.resolve([
        { path: join(folder, 'ttyUSB0'), manufacturer: 'Millrace', vendorId: '0001' },
        { path: join(folder, 'ttyS0') },
        { path: join(folder, 'ttyS1'), vendorId: '0002' },
      ]);
    expect(await machinePorts({ deviceFolder: folder, list })).toEqual([
      { path: join(folder, 'ttyS1'), device: join(folder, 'ttyS1') },
      { path: join(folder, 'ttyUSB0'), device: join(folder, 'ttyUSB0'), maker: 'Millrace' },
    ]);
  });

  test('When there is none, then the list is empty', async () => {
    expect(await machinePorts({ deviceFolder: join(folder, 'none'), list: absent })).toEqual([]);
  });
});
