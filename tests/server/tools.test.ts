// npm run backup, restore and rotate-key as processes of their own, on a cluster of their own, beside a server and without one.
import { spawn, type ChildProcess } from 'node:child_process';
import { chmodSync, existsSync, mkdtempSync, readFileSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { execa } from 'execa';
import { afterAll, beforeAll, expect, test } from 'vitest';
import { urlOfCluster } from '../../server/postgres/cluster.js';
import { folderOfOwnCluster } from '../../server/postgres/own-cluster.js';
import { isBuilt } from '../helpers/the-program.js';

const checkout = join(import.meta.dirname, '../..');
let folder: string;
let serverProcess: ChildProcess | undefined;

/** As npm test has just built it, otherwise from the sources. */
const program = (name: string): string[] => (isBuilt ? [`dist/server/${name}.js`] : ['--import', 'tsx', `server/${name}.ts`]);

const tool = (name: string, args: string[], dataDir = join(folder, 'data'), databaseUrl?: string) =>
  execa(process.execPath, [...program(`tools/${name}`), ...args], {
    cwd: checkout,
    env: { REFETTLE_DATA: dataDir, REFETTLE_DEMO: '0', INIT_CWD: folder, ...(databaseUrl ? { DATABASE_URL: databaseUrl } : {}) },
    reject: false,
    stdin: 'ignore',
  });

/** Starts a server on any free port, and gives its whole announcement when it is ready. */
async function startServer(dataDir: string): Promise<string> {
  const child = spawn(process.execPath, program('main'), {
    cwd: checkout,
    env: { PATH: process.env.PATH, PORT: '0', REFETTLE_DATA: dataDir, REFETTLE_DEMO: '0' },
    stdio: ['ignore', 'pipe', 'inherit'],
  });
  serverProcess = child;
  let text = '';
  await new Promise<void>((ready, failed) => {
    child.once('exit', () => failed(new Error(`the server ended: ${text}`)));
    child.stdout.setEncoding('utf8').on('data', (chunk: string) => {
      text += chunk;
      if (text.includes('Ctrl-C stops it')) ready();
    });
  });
  return text;
}

async function stopServer(): Promise<void> {
  const child = serverProcess;
  if (!child || child.exitCode !== null) return;
  const ended = new Promise((done) => child.once('exit', done));
  child.kill('SIGTERM');
  await ended;
}

beforeAll(() => {
  folder = mkdtempSync(join(tmpdir(), 'refettle-tools-'));
  chmodSync(folder, 0o711); // as root, PostgreSQL's user must pass through
});
afterAll(async () => {
  await stopServer();
  rmSync(folder, { recursive: true, force: true });
});

test('When a shop runs, then it is backed up and its key rotated beside it; when it is off, then it is restored elsewhere, and its admin signs in there', async () => {
  const said = await startServer(join(folder, 'data'));
  const [, base = '', token = ''] = /(http:\/\/[^/\s]+)\/first-admin#([\w-]+)/.exec(said) ?? [];
  const person = { email: 'joss@millrace.example', password: 'a mill race in March' };
  const post = (at: string, path: string, body: object) =>
    fetch(`${at}${path}`, { method: 'POST', headers: { 'content-type': 'application/json' }, body: JSON.stringify(body) });
  expect((await post(base, '/api/first-admin', { ...person, name: 'Joss Penn', token })).status).toBe(201);

  const rotated = await tool('rotate-key', []);
  expect([rotated.exitCode, rotated.stderr]).toEqual([0, '']);
  expect(rotated.stdout).toMatch(/^Tags are signed by key [\w-]{43} from now on\.\nKey [\w-]{43} is retired/);

  const backup = await tool('backup', ['--json', 'shop.tar']);
  expect([backup.exitCode, backup.stderr]).toEqual([0, '']);
  expect(JSON.parse(backup.stdout)).toMatchObject({
    file: join(folder, 'shop.tar'),
    manifest: { counts: { people: 1, units: 0, tags: 0 } },
  });

  // Over a server that runs, nothing is restored.
  const early = await tool('restore', ['shop.tar', '--replace']);
  expect(early.exitCode).toBe(1);
  expect(early.stderr).toContain('already works in');
  const [port] = readFileSync(join(folderOfOwnCluster(join(folder, 'data')) ?? '', 'postmaster.pid'), 'utf8')
    .split('\n')
    .slice(3);
  const password = readFileSync(join(folder, 'data', 'postgres-password'), 'utf8').trim();
  const byAddress = await tool('restore', ['shop.tar', '--replace'], join(folder, 'third'), urlOfCluster(password, Number(port)));
  expect(byAddress.exitCode).toBe(1);
  expect(byAddress.stderr).toContain('A Refettle server or tool works with this database.');
  await stopServer();

  const restored = await tool('restore', ['shop.tar'], join(folder, 'other'));
  expect([restored.exitCode, restored.stderr]).toEqual([0, '']);
  expect(restored.stdout).toMatch(/^Restored My shop as it was at .+: 1 people, 0 units, 0 tags, 1 files\./);

  const there = /Refettle is ready: (\S+)/.exec(await startServer(join(folder, 'other')))?.[1] ?? '';
  expect((await post(there, '/api/sessions', person)).status).toBe(201);
}, 300_000);

test('When a tool is called wrongly, then it says how it is called', async () => {
  const wrong = await tool('backup', ['--nonsense']);
  expect([wrong.exitCode, wrong.stdout]).toEqual([2, '']);
  expect(wrong.stderr).toContain('npm run backup');
  const help = await tool('restore', ['--help']);
  expect([help.exitCode, help.stderr]).toEqual([0, '']);
  expect(help.stdout).toContain('npm run restore -- FILE');
  expect((await tool('restore', [])).stderr).toContain('Name it: npm run restore -- FILE.');
  expect(existsSync(join(folder, 'refettle.tar'))).toBe(false);
});
