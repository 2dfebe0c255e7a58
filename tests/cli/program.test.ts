import { spawn } from 'node:child_process';
import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, describe, expect, test } from 'vitest';
import { theProgram } from '../helpers/the-program.js';

const folder = mkdtempSync(join(tmpdir(), 'refettle-program-'));
afterAll(() => rmSync(folder, { recursive: true, force: true }));
const repository = new URL('../..', import.meta.url);
const shop = (name: string): string => new URL(`server/seed/shop/${name}`, repository).pathname;

interface Outcome {
  code: number | null;
  stdout: string;
  stderr: string;
}

/** The real program as a process of its own, without a terminal. Nothing listens at the server's port. */
function refettle(...args: string[]): Promise<Outcome> {
  const env = { PATH: process.env['PATH'], LANG: 'C.UTF-8', REFETTLE_HOME: folder, REFETTLE_SERVER: 'http://127.0.0.1:65534' };
  const child = spawn(process.execPath, [...theProgram, ...args], {
    cwd: repository,
    env,
    stdio: ['ignore', 'pipe', 'pipe'],
  });
  const outcome = { code: null as number | null, stdout: '', stderr: '' };
  child.stdout.on('data', (chunk: Buffer) => (outcome.stdout += chunk.toString()));
  child.stderr.on('data', (chunk: Buffer) => (outcome.stderr += chunk.toString()));
  return new Promise((done) => child.once('close', (code) => done({ ...outcome, code })));
}

const judge = ['judge', '--value', '12.41k', '--unit', 'ohm', '--low', '11.4k', '--accuracy', '0.8%+3', '--resolution', '10'];

describe('The program as a process', () => {
  test('When help is asked for, then it is on standard output, exits 0, and names every command', async () => {
    const { code, stdout, stderr } = await refettle('--help');
    expect([code, stderr]).toEqual([0, '']);
    for (const command of ['sign-in', 'unit', 'sheet', 'decode', 'judge', 'capture', 'measure', 'run', 'repair', 'override', 'sync', 'tag'])
      expect(stdout).toMatch(new RegExp(`^ {2}${command}\\b`, 'm'));
  });

  test.each([
    ['nothing at all', []],
    ['an unknown command', ['refurbish']],
    ['an unknown option', [...judge, '--colour', 'red']],
    ['a missing option', ['judge', '--value', '1', '--unit', 'V']],
    ['neither limit', ['judge', '--value', '1', '--unit', 'V', '--accuracy', '1%+1', '--resolution', '1']],
    ['decode without a sheet', ['decode', 'a.lamps.ndjson']],
    ['a unit number that is none', ['unit', 'show', 'twelve']],
    ['sign-in without a terminal and without a password', ['sign-in', 'wil@millrace.example']],
  ])('When it is used wrongly (%s), then it exits 2, says so on standard error, and standard output is empty', async (_case, args) => {
    const { code, stdout, stderr } = await refettle(...args);
    expect([code, stdout]).toEqual([2, '']);
    expect(stderr).not.toBe('');
  });

  test('When decode and judge are asked, then the command line hands everything on', async () => {
    const judged = await refettle(...judge, '--high=12.6k', '--json');
    expect(judged.code).toBe(0);
    // Contract, section 4: the example.
    expect(JSON.parse(judged.stdout)).toMatchObject({ value: 12410, unit: 'ohm', low: 11400, high: 12600, verdict: 'pass' });
    const missing = await refettle('decode', '--sheet', shop('heron-h6.yaml'), join(folder, 'not-there.lamps.ndjson'), '--json');
    expect(missing.code).toBe(3);
    expect(JSON.parse(missing.stdout)).toMatchObject({ error: {} });
  });

  test('When a sheet and a script are checked, then good ones exit 0 and a bad one 3 with its line', async () => {
    const good = await refettle('sheet', 'check', shop('heron-h6.yaml'), '--script', shop('h6-prove.yaml'));
    expect([good.code, good.stderr]).toEqual([0, '']);
    const bad = join(folder, 'bad.yaml');
    writeFileSync(bad, 'format: refettle.sheet\nversion: 1\nedition: zero\n');
    const refused = await refettle('sheet', 'check', bad, '--json');
    expect(refused.code).toBe(3);
    expect(refused.stderr).toContain('bad.yaml');
    expect(JSON.parse(refused.stdout)).toMatchObject({ good: false });
    expect((await refettle('sheet', 'check', join(folder, 'nowhere.yaml'))).code).toBe(3);
  });

  test('When the server can’t be reached or nobody is signed in, then it exits 5 and says what to do', async () => {
    const away = await refettle('sheet', 'show', 'heron-h6');
    expect(away.code).toBe(5);
    expect(away.stderr).toMatch(/127\.0\.0\.1:65534.*nothing listens there/s);
    expect(away.stderr).toContain('REFETTLE_SERVER');
    const nobody = await refettle('run', shop('h6-find.yaml'), '412');
    expect(nobody.code).toBe(5);
    expect(nobody.stderr).toContain('refettle sign-in');
  });

  test('When a script isn’t there or is none, then it exits 3 before anything else', async () => {
    expect(await refettle('run', 'nowhere.yaml', '412')).toMatchObject({ code: 3, stdout: '' });
    expect((await refettle('run', shop('heron-h6.yaml'), '412')).code).toBe(3);
  });
});
