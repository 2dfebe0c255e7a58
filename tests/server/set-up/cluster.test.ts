import { execFileSync, spawn, type ChildProcess } from 'node:child_process';
import { once } from 'node:events';
import { chmodSync, existsSync, mkdirSync, mkdtempSync, readdirSync, readFileSync, rmSync, statSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import pg from 'pg';
import { afterAll, afterEach, beforeAll, beforeEach, expect, test } from 'vitest';
import { openDb } from '../../../server/db.js';
import { startCluster, type Cluster, type ClusterPlace } from '../../../server/postgres/cluster.js';
import { asOwner, ownerOfCluster } from '../../../server/postgres/owner.js';
import { startOwnCluster } from '../../../server/postgres/own-cluster.js';

let original: string;
let folder: string;
let place: ClusterPlace;
let running: Cluster[];

function emptyFolder(): string {
  const made = mkdtempSync(join(tmpdir(), 'refettle-test-set-up-'));
  chmodSync(made, 0o711); // as root, PostgreSQL's user must pass through
  return made;
}
const placeIn = (parent: string): ClusterPlace => ({
  folder: join(parent, 'postgres'),
  passwordFile: join(parent, 'password'),
  logFile: join(parent, 'postgres.log'),
});

// Made once and copied: to lay out a cluster takes a second or two.
beforeAll(async () => {
  original = emptyFolder();
  await (await startCluster(placeIn(original), { durable: false })).stop();
});
afterAll(() => {
  rmSync(original, { recursive: true, force: true });
});
beforeEach(() => {
  folder = emptyFolder();
  execFileSync('cp', ['--archive', `${original}/.`, folder]);
  place = placeIn(folder);
  running = [];
});
afterEach(async () => {
  await Promise.all(running.map((cluster) => cluster.stop()));
  rmSync(folder, { recursive: true, force: true });
});

async function start(options = { durable: true }): Promise<Cluster> {
  const cluster = await startCluster(place, options);
  running.push(cluster);
  return cluster;
}

async function ask(cluster: Cluster, sql: string): Promise<unknown[]> {
  const db = openDb(cluster.url);
  try {
    const { rows } = await db.raw<{ rows: unknown[] }>(sql);
    return rows;
  } finally {
    await db.destroy();
  }
}
const storeOneRow = (cluster: Cluster): Promise<unknown[]> => ask(cluster, "create table kept as select 'a reading' as what");

function isAlive(processId: number): boolean {
  const status = `/proc/${processId.toString()}/status`;
  // A zombie (Z) has ended; whoever adopted it has only not asked yet.
  return existsSync(status) && !/^State:\s+Z/m.test(readFileSync(status, 'utf8'));
}

test('When a cluster is stopped and started again, then its rows are there', async () => {
  const first = await start();
  await storeOneRow(first);
  await first.stop();
  expect(isAlive(first.processId)).toBe(false);

  expect(await ask(await start(), 'select what from kept')).toEqual([{ what: 'a reading' }]);
});

test('When a cluster stops while a client is busy, then it does not wait for the client', async () => {
  const cluster = await start();
  // Seconds: longer than the test may take.
  const busy = ask(cluster, 'select pg_sleep(600)').catch((error: unknown) => String(error));
  await expect.poll(() => ask(cluster, "select 1 as one from pg_stat_activity where query like 'select pg_sleep%'")).toEqual([{ one: 1 }]);

  await cluster.stop();

  expect(await busy).toMatch(/terminat/i);
});

test('When PostgreSQL is killed without a word, then the next start brings back every committed row', async () => {
  const first = await start();
  await storeOneRow(first);
  process.kill(first.processId, 'SIGKILL');
  await first.ended;
  expect(existsSync(join(place.folder, 'postmaster.pid'))).toBe(true); // nobody tidied up

  expect(await ask(await start(), 'select what from kept')).toEqual([{ what: 'a reading' }]);
});

test('When the program that started PostgreSQL is killed without a word, then PostgreSQL goes too, and the next start has every row', async () => {
  const { program, processId } = await startInAnotherProgram();

  program.kill('SIGKILL');

  expect(await ask(await start(), 'select what from kept')).toEqual([{ what: 'a reading' }]);
  expect(isAlive(processId)).toBe(false);
});

test('When an earlier PostgreSQL still runs in the folder, then it is stopped cleanly and a new one takes over', async () => {
  const earlier = await start();
  await storeOneRow(earlier);

  const later = await start();

  await earlier.ended;
  expect(later.processId).not.toBe(earlier.processId);
  expect(await ask(later, 'select what from kept')).toEqual([{ what: 'a reading' }]);
  expect(readFileSync(`${place.logFile}.previous`, 'utf8')).toContain('database system is shut down');
});

test('When the number in a stale note was given to another process since, then the start is not kept back and the other lives on', async () => {
  const first = await start();
  await storeOneRow(first);
  const note = readFileSync(join(place.folder, 'postmaster.pid'), 'utf8');
  await first.stop();
  const [file, args] = asOwner(ownerOfCluster(place.folder), ['sleep', '60'], { endsWithUs: true });
  const stranger = spawn(file, args, { stdio: 'ignore' });
  try {
    writeFileSync(join(place.folder, 'postmaster.pid'), note.replace(/^\d+/, String(stranger.pid)));

    expect(await ask(await start(), 'select what from kept')).toEqual([{ what: 'a reading' }]);
    expect(stranger.exitCode).toBeNull();
  } finally {
    stranger.kill();
  }
});

test('When a cluster is made, then only its owner can read the password, the log and the rows, and nobody gets in without the password', async () => {
  rmSync(place.folder, { recursive: true });
  rmSync(place.passwordFile);

  const cluster = await start({ durable: false });

  expect((statSync(place.passwordFile).mode & 0o777).toString(8)).toBe('600');
  expect((statSync(place.logFile).mode & 0o777).toString(8)).toBe('600');
  expect((statSync(place.folder).mode & 0o777).toString(8)).toBe('700');
  const { password } = new URL(cluster.url);
  expect(readFileSync(place.passwordFile, 'utf8').trim()).toBe(password);
  const intruder = new pg.Client({ connectionString: cluster.url.replace(password, 'guessed') });
  await expect(intruder.connect()).rejects.toThrow('password authentication failed');
});

test('When a cluster runs, then it listens on loopback alone and what it commits is on the disk', async () => {
  const rows = await ask(
    await start(),
    "select name, setting from pg_settings where name in ('listen_addresses', 'fsync', 'synchronous_commit', 'unix_socket_directories', 'password_encryption') order by name",
  );

  expect(rows).toEqual([
    { name: 'fsync', setting: 'on' },
    { name: 'listen_addresses', setting: '127.0.0.1' },
    { name: 'password_encryption', setting: 'scram-sha-256' },
    { name: 'synchronous_commit', setting: 'on' },
    { name: 'unix_socket_directories', setting: '' },
  ]);
});

test('When an earlier start was killed while the cluster was made, then the half-made one is cleared away', async () => {
  const halfMade = join(folder, 'postgres-new-Ab12Cd');
  mkdirSync(join(halfMade, 'data'), { recursive: true });
  rmSync(place.folder, { recursive: true });
  rmSync(place.logFile);

  await start({ durable: false });

  expect(readdirSync(folder).sort()).toEqual(['password', 'postgres', 'postgres.log']);
});

test('When the password is lost, then the start says which file is missing and touches nothing', async () => {
  rmSync(place.passwordFile);

  await expect(start()).rejects.toThrow(`${place.passwordFile} is not there`);
  expect(existsSync(place.passwordFile)).toBe(false);
});

test('When the folder was made by a version that is not installed, then the start names the package to install', async () => {
  writeFileSync(join(place.folder, 'PG_VERSION'), '9\n');

  await expect(start()).rejects.toMatchObject({ remedy: expect.stringContaining('postgresql-9') as string });
});

test('When PostgreSQL refuses to start, then the reason is in the error', async () => {
  writeFileSync(join(place.folder, 'postgresql.conf'), 'no_such_setting = on\n');

  await expect(start()).rejects.toThrow('no_such_setting');
});

test('When the data folder lies below a folder that is closed to others, then the database is put where its user can go, and found again', async () => {
  const closed = join(folder, 'closed');
  const dataDir = join(closed, 'data');
  const elsewhere = join(folder, 'elsewhere');
  mkdirSync(dataDir, { recursive: true });
  chmodSync(dataDir, 0o711);
  chmodSync(closed, 0o700);
  const first = await startOwnCluster(dataDir, elsewhere);
  running.push(first);
  await storeOneRow(first);
  await first.stop();

  const second = await startOwnCluster(dataDir, elsewhere);
  running.push(second);

  expect(await ask(second, 'select what from kept')).toEqual([{ what: 'a reading' }]);
  // Only as root does PostgreSQL run as somebody else, to whom the folder is closed.
  expect(existsSync(join(dataDir, 'postgres'))).toBe(process.getuid?.() !== 0);
});

test('When the database lay elsewhere and is gone, then the start says so and does not begin an empty one', async () => {
  rmSync(place.folder, { recursive: true });
  writeFileSync(join(folder, 'postgres-folder.txt'), `${join(folder, 'gone')}\n`);

  await expect(startOwnCluster(folder)).rejects.toThrow(`it is in ${join(folder, 'gone')}`);
  expect(existsSync(place.folder)).toBe(false);
});

async function startInAnotherProgram(): Promise<{ program: ChildProcess; processId: number }> {
  const script = `
    import { openDb } from './server/db.ts';
    import { startCluster } from './server/postgres/cluster.ts';
    const cluster = await startCluster(${JSON.stringify(place)}, { durable: true });
    await openDb(cluster.url).raw("create table kept as select 'a reading' as what");
    console.log(cluster.processId);
    setInterval(() => {}, 1000);`;
  const program = spawn(process.execPath, ['--import', 'tsx', '--input-type=module', '--eval', script], {
    stdio: ['ignore', 'pipe', 'inherit'],
  });
  const [chunk] = (await once(program.stdout, 'data')) as [Buffer];
  return { program, processId: Number(chunk.toString()) };
}
