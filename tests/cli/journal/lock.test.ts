import { execFile, spawn } from 'node:child_process';
import { mkdirSync, readdirSync, readFileSync, writeFileSync } from 'node:fs';
import { hostname } from 'node:os';
import { join } from 'node:path';
import { afterEach, beforeEach, describe, expect, test } from 'vitest';
import { heldWords, lockOwner, takeLock, type LockOwner } from '../../../cli/journal/lock.js';
import { faults } from '../../helpers/faults.js';
import { benchTerminal, type BenchTerminal } from '../../helpers/bench-terminal.js';

let bench: BenchTerminal;
beforeEach(() => {
  bench = benchTerminal();
});
afterEach(() => bench.remove());

/** Above what Linux gives out (4194304, proc(5)). */
const GONE = 4_200_000;
const owner = (over: Partial<LockOwner> = {}): LockOwner => ({
  pid: GONE,
  host: hostname(),
  since: '2026-03-05T09:00:00.000Z',
  what: 'bench run h6-find on No. 0412 by Wil Tarrow',
  ...over,
});
const folder = (): string => join(bench.home, 'journal', 'locks', 'rig-bench%202');
const leave = (one: LockOwner): void => {
  mkdirSync(folder(), { recursive: true });
  writeFileSync(join(folder(), 'left.json'), JSON.stringify(one));
};
const take = () => takeLock(bench.context, 'rig-bench 2', { what: 'mine' });

describe('One run a rig at a time', () => {
  test('When somebody has it, then the second is told who, since when, and by which process', async () => {
    const first = await take();
    expect(first).toHaveProperty('release');
    const second = await take();
    expect('owner' in second && heldWords(second.owner)).toMatch(new RegExp(`^mine, since .* \\(process ${process.pid}\\)$`));
    if ('release' in first) first.release();
    expect(await take()).toHaveProperty('release');
  });

  test('When the process that had it is gone, then it is taken over, with a word', async () => {
    leave(owner());
    expect(lockOwner(bench.context, 'rig-bench 2')).toBeUndefined();
    expect(await take()).toHaveProperty('release');
    expect(bench.stderr()).toContain('bench run h6-find on No. 0412 by Wil Tarrow');
    expect(bench.stderr()).toContain(`process ${GONE} is gone`);
    expect(readdirSync(folder())).toHaveLength(1);
  });

  test('When its number was given to another process since, then it is taken over', async () => {
    // This test's own process, but begun at another moment of the same boot (proc(5), field 22 of stat).
    const boot = readFileSync('/proc/sys/kernel/random/boot_id', 'utf8').trim();
    leave(owner({ pid: process.pid, processStart: '1', boot }));
    expect(await take()).toHaveProperty('release');
  });

  test('When the machine was booted since, then it is taken over', async () => {
    leave(owner({ pid: process.pid, boot: 'another boot' }));
    expect(await take()).toHaveProperty('release');
  });

  test('When it was taken on another machine, then nobody can tell: it stands, and which file to delete is said', async () => {
    leave(owner({ host: 'bench-7' }));
    const held = await take();
    expect('owner' in held && heldWords(held.owner)).toContain(
      `on bench-7; where nothing goes on there any more, delete ${join(folder(), 'left.json')}`,
    );
  });

  test('When the machine has another name since, then its own processes are asked for all the same', async () => {
    const boot = readFileSync('/proc/sys/kernel/random/boot_id', 'utf8').trim();
    leave(owner({ host: 'bench-7', boot }));
    expect(await take()).toHaveProperty('release');
  });

  test('When a process was killed that held it, then the lock does not outlive it', async () => {
    const child = spawn(process.execPath, ['-e', 'setInterval(() => {}, 1000)']);
    const stat = readFileSync(`/proc/${child.pid ?? 0}/stat`, 'utf8');
    const processStart = stat.slice(stat.lastIndexOf(')') + 2).split(' ')[19] ?? '';
    leave(owner({ pid: child.pid ?? 0, processStart }));
    expect(await take()).toHaveProperty('owner');
    child.kill('SIGKILL');
    await new Promise((gone) => child.once('exit', gone));
    expect(await take()).toHaveProperty('release');
  });

  test('When several programs want it at the same moment, again and again, then never two have it', { timeout: 60_000 }, async () => {
    const { count } = faults('programs that want one lock', 4);
    const program = join(bench.home, 'contender.mts');
    const from = (path: string): string => JSON.stringify(new URL(`../../../${path}`, import.meta.url).href);
    writeFileSync(
      program,
      `import { mkdirSync, rmdirSync } from 'node:fs';
import { homeOf } from ${from('cli/home.ts')};
import { newId } from ${from('cli/new-id.ts')};
import { takeLock } from ${from('cli/journal/lock.ts')};
const context = { home: homeOf({ REFETTLE_HOME: ${JSON.stringify(bench.home)} }), newId, now: () => new Date(), sleep: (ms) => new Promise((on) => setTimeout(on, ms)), stderr: { say() {} } };
let had = 0, clashes = 0;
for (let round = 0; round < 30; round += 1) {
  const lock = await takeLock(context, 'rig', { what: 'contender' });
  if (!('release' in lock)) continue;
  had += 1;
  // Making a folder succeeds once: whoever finds it there is not alone.
  try { mkdirSync(${JSON.stringify(join(bench.home, 'alone'))}); await context.sleep(2); rmdirSync(${JSON.stringify(join(bench.home, 'alone'))}); } catch { clashes += 1; }
  lock.release();
}
process.stdout.write(JSON.stringify({ had, clashes }));`,
    );
    const contender = (): Promise<{ had: number; clashes: number }> =>
      new Promise((done, failed) =>
        execFile(process.execPath, ['--import', 'tsx', program], { cwd: new URL('../../..', import.meta.url) }, (error, stdout) =>
          error ? failed(new Error(error.message)) : done(JSON.parse(stdout) as { had: number; clashes: number }),
        ),
      );
    const outcomes = await Promise.all(Array.from({ length: count }, contender));
    expect(outcomes.reduce((sum, { clashes }) => sum + clashes, 0)).toBe(0);
    expect(outcomes.reduce((sum, { had }) => sum + had, 0)).toBeGreaterThan(2 * count);
  });
});
