import { mkdtempSync, rmSync, statSync, symlinkSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterEach, beforeEach, expect, test } from 'vitest';
import { holdDataFolder, makeDataFolder } from '../../../server/data-folder.js';

let folder: string;
beforeEach(() => {
  folder = mkdtempSync(join(tmpdir(), 'refettle-test-data-'));
});
afterEach(() => {
  rmSync(folder, { recursive: true, force: true });
});

test('When a data folder is made, then others cannot list it', () => {
  const dataDir = join(folder, 'deep', 'data');

  makeDataFolder(dataDir);
  makeDataFolder(dataDir);

  expect(statSync(dataDir).mode & 0o066).toBe(0);
});

test('When a data folder can not be made, then the error says where and how to name another', () => {
  // Nobody makes a folder below a device, root neither.
  expect(() => {
    makeDataFolder('/dev/null/data');
  }).toThrow(
    expect.objectContaining({
      message: expect.stringContaining('/dev/null/data') as string,
      remedy: expect.stringContaining('REFETTLE_DATA') as string,
    }),
  );
});

test('When a second server wants a data folder that is held, then it is told which process holds it, also by another name', async () => {
  const hold = await holdDataFolder(folder);
  const otherName = join(folder, 'link');
  symlinkSync(folder, otherName);

  for (const name of [folder, otherName]) {
    await expect(holdDataFolder(name)).rejects.toMatchObject({
      message: expect.stringContaining(`process ${process.pid.toString()}`) as string,
      remedy: expect.stringContaining('REFETTLE_DATA') as string,
    });
  }
  hold.release();
});

test('When the first server lets go, then the next one gets the folder; another folder was free all along', async () => {
  const first = await holdDataFolder(folder);
  const other = await holdDataFolder(tmpdir());
  first.release();

  const second = await holdDataFolder(folder);

  second.release();
  other.release();
});
