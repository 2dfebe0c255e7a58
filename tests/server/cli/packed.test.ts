// The bench without the checkout: what `npm pack` makes, unpacked where a bench would install it.
import { builtinModules } from 'node:module';
import { mkdirSync, mkdtempSync, readdirSync, readFileSync, rmSync, symlinkSync } from 'node:fs';
import type { Server } from 'node:http';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { execa } from 'execa';
import { preProcessFile } from 'typescript';
import { afterAll, beforeAll, expect, test } from 'vitest';
import { hashPassword } from '../../../server/auth/password.js';
import { insertPerson } from '../../../server/auth/people-store.js';
import { addressOf, closeServer, listen } from '../../../server/listen.js';
import { addHeron, takeIn } from '../../helpers/factories.js';
import { isBuilt } from '../../helpers/the-program.js';
import { startTestServer, type TestServer } from '../../helpers/test-server.js';

const checkout = join(import.meta.dirname, '../../..');
const PASSWORD = 'a mill race in March';
let folder: string;
let server: TestServer;
let http: Server;

beforeAll(async () => {
  folder = mkdtempSync(join(tmpdir(), 'refettle-packed-'));
  // npm test has built it; otherwise npm builds it as it would for a person.
  const scripts = isBuilt ? ['--ignore-scripts'] : [];
  await execa('npm', ['pack', '--silent', '--pack-destination', folder, ...scripts], { cwd: checkout, stdin: 'ignore' });
  const [tarball = ''] = readdirSync(folder);
  await execa('tar', ['-xzf', join(folder, tarball), '-C', folder]);
  // In the place of an installation, which would load some eighty packages: those that are here already.
  symlinkSync(join(checkout, 'node_modules'), join(folder, 'node_modules'));
  server = await startTestServer({ shop: { demo: true } });
  await addHeron(server);
  const person = {
    id: '019af7a0-0000-7000-8000-000000000001',
    name: 'Perrin Vale',
    email: 'perrin@millrace.example',
    role: 'technician' as const,
  };
  await insertPerson(server.deps.db, { ...person, passwordHash: await hashPassword(PASSWORD), createdAt: server.time.now });
  server.time.now = new Date();
  http = await listen(server.app, '127.0.0.1', 0);
}, 180_000);
afterAll(async () => {
  await closeServer(http);
  await server.close();
  rmSync(folder, { recursive: true, force: true });
});

/** On a bench: another folder to stand in, a home of its own. */
function refettle(args: string[], input = '') {
  const bench = join(folder, 'bench');
  mkdirSync(bench, { recursive: true });
  return execa(process.execPath, [join(folder, 'package/dist/cli/main.js'), ...args], {
    cwd: bench,
    env: { PATH: process.env.PATH, HOME: bench, REFETTLE_HOME: join(bench, 'home'), REFETTLE_SERVER: addressOf(http) },
    extendEnv: false,
    reject: false,
    input,
  });
}

const filesOf = (): string[] =>
  readdirSync(join(folder, 'package'), { recursive: true, withFileTypes: true })
    .filter((entry) => entry.isFile())
    .map((entry) => join(entry.parentPath, entry.name));

test('When it is packed, then it holds the terminal program and what that needs, and nothing of server, web or tests', () => {
  const names = filesOf().map((file) => file.slice(join(folder, 'package/').length));
  expect(names).toEqual(expect.arrayContaining(['package.json', 'README.md', 'dist/cli/main.js', 'server/seed/shop/heron-h6.yaml']));
  const rest = names.filter((name) => !/^(dist\/(cli|shared)\/.+\.js|server\/seed\/shop\/.+\.yaml|package\.json|README\.md)$/.test(name));
  expect(rest).toEqual([]);
});

test('When it imports a package, then that is one of those that npm installs with it', () => {
  const { dependencies } = JSON.parse(readFileSync(join(folder, 'package/package.json'), 'utf8')) as {
    dependencies: Record<string, string>;
  };
  const imported = new Set<string>();
  for (const file of filesOf().filter((name) => name.endsWith('.js'))) {
    for (const { fileName } of preProcessFile(readFileSync(file, 'utf8'), true, true).importedFiles) {
      if (/^(\.|node:)/.test(fileName) || builtinModules.includes(fileName)) continue;
      imported.add(
        fileName
          .split('/')
          .slice(0, fileName.startsWith('@') ? 2 : 1)
          .join('/'),
      );
    }
  }
  expect(imported.size).toBeGreaterThan(5);
  expect([...imported].filter((name) => dependencies[name] === undefined)).toEqual([]);
});

test('When nobody serves, then version, help, decode and judge answer', async () => {
  expect((await refettle(['--version'])).stdout).toMatch(/^\d+\.\d+\.\d+$/);
  expect((await refettle(['--help'])).stdout).toContain('decode');
  const examples = join(checkout, 'tests/fixtures/examples/captures');
  const sheet = join(folder, 'package/server/seed/shop/heron-h6.yaml');
  const decoded = await refettle(['decode', '--sheet', sheet, join(examples, '01-one-code.lamps.ndjson'), '--json']);
  expect([decoded.exitCode, decoded.stderr]).toEqual([0, '']);
  expect(JSON.parse(decoded.stdout)).toHaveProperty('segments');
  const judged = await refettle(
    'judge --value 12.41k --unit ohm --low 11.4k --high 12.6k --accuracy 0.8%+3 --resolution 10 --json'.split(' '),
  );
  expect(JSON.parse(judged.stdout)).toMatchObject({ verdict: 'pass' });
}, 120_000);

test('When there is a server, then it signs in, runs a script by its name on a simulated rig, and the run is on the books', async () => {
  const { number } = await takeIn(server);
  const signedIn = await refettle(['sign-in', '--email', 'perrin@millrace.example', '--password-stdin'], `${PASSWORD}\n`);
  expect([signedIn.exitCode, signedIn.stderr]).toEqual([0, expect.any(String)]);
  const run = await refettle(['run', 'h6-find', String(number), '--rig', 'sim:heron-mend', '--unattended']);
  expect(run.exitCode, run.stderr).toBe(1); // the fault is found
  const page = await server.ok('getUnit', { params: { number }, as: server.people.lead });
  expect(page.runs).toMatchObject([{ verdict: 'fail' }]);
  const tag = await refettle(['tag', String(number)]);
  expect([tag.exitCode, tag.stdout.length > 100]).toEqual([1, true]);
}, 120_000);
