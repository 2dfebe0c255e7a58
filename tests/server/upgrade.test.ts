// From the first release's database to today's, by the migrations that are there.
import { existsSync, mkdtempSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import { ROLES, mayDo } from '../../shared/api/roles.js';
import { routes, type RouteName } from '../../shared/api/routes.js';
import { migrate } from '../../server/db.js';
import { registerSigningKey } from '../../server/features/tags/signing-key-store.js';
import { loadSigningKey, readSigningKey } from '../../server/features/tags/signing-key.js';
import { migrationSource } from '../../server/migration-source.js';
import { seedDemoShop } from '../../server/seed/seed-demo-shop.js';
import { firstRelease, firstReleaseDatabase, firstReleasePeople, placeFirstReleaseKey, SOON_AFTER } from '../helpers/first-release.js';
import type { FreshDatabase } from '../helpers/fresh-database.js';
import { mendAndProve, newRepair, newUnit, rulesSeen } from '../helpers/factories.js';
import { startTestServer, type TestServer } from '../helpers/test-server.js';

let database: FreshDatabase;
let server: TestServer;
let dataDir: string;
let before: Record<string, number>;

const countRows = async (): Promise<Record<string, number>> => {
  const counts: Record<string, number> = {};
  for (const table of ['people', 'sessions', 'sheets', 'units', 'unit_events', 'captures', 'runs', 'tags', 'idempotency_keys']) {
    const [row] = await database.db(table).count<{ count: number }[]>({ count: '*' });
    counts[table] = Number(row?.count);
  }
  return counts;
};

beforeAll(async () => {
  dataDir = mkdtempSync(join(tmpdir(), 'refettle-upgrade-'));
  placeFirstReleaseKey(dataDir);
  database = await firstReleaseDatabase();
  before = await countRows();
  // As a start does it.
  await migrate(database.db);
  await registerSigningKey(database.db, await loadSigningKey(dataDir), SOON_AFTER);
  server = await startTestServer({
    existing: { database, people: await firstReleasePeople(database) },
    signingKey: () => readSigningKey(dataDir),
    config: { dataDir, demo: true },
  });
  server.time.now = new Date(SOON_AFTER);
});
afterAll(async () => {
  await server.close();
  await database.drop();
  rmSync(dataDir, { recursive: true, force: true });
});

test('When it is migrated, then every migration was applied, and no row of the first release is gone', async () => {
  expect(await database.db('knex_migrations').orderBy('name').pluck<string[]>('name')).toEqual(await migrationSource.getMigrations([]));
  expect(await countRows()).toEqual(before);
  expect(before).toMatchObject({ units: 5, tags: 2, sheets: 1 }); // counted by hand in the first release's demo shop
});

test.each(Object.entries(firstRelease.tags))(
  'When the buyer of tag %s comes back, then signature and word still prove it',
  async (tag, known) => {
    for (const query of [{ signature: known.signature }, { word: known.word }]) {
      expect(await server.ok('getPublicTag', { params: { tag }, query })).toMatchObject({ standing: known.standing, content: { tag } });
    }
  },
);

test.each(ROLES)('When %s comes with the old token, or signs in with the old password, then both are taken', async (role) => {
  expect((await server.ok('me', { as: server.people[role] })).user).toMatchObject({ role });
  const account = firstRelease.accounts.find((one) => one.role === role);
  expect(await server.ok('signIn', { body: { email: account?.email, password: account?.password } })).toMatchObject({ user: { role } });
});

describe('When the first release’s data is read by every route that reads', () => {
  const reading = (Object.keys(routes) as RouteName[]).filter(
    (name) =>
      routes[name].method === 'GET' &&
      !('stream' in routes[name]) &&
      [undefined, ...ROLES].some((role) => mayDo(role, routes[name].action)),
  );

  /** Every thing of each kind that the first release stored, as path parameters of the routes to it and below it. */
  const everyOne: Record<string, () => Promise<Record<string, string | number>[]>> = {
    '/api/units/:number': async () => (await database.db('units').pluck<number[]>('number')).map((number) => ({ number })),
    '/api/units/:number/tag': async () =>
      (await database.db('tags').join('units', 'units.id', 'tags.unit_id').pluck<number[]>('units.number')).map((number) => ({ number })),
    '/api/captures/:id': async () => (await database.db('captures').pluck<string[]>('id')).map((id) => ({ id })),
    '/api/runs/:id': async () => (await database.db('runs').pluck<string[]>('id')).map((id) => ({ id })),
    '/api/sheets/:family': async () => (await database.db('sheets').pluck<string[]>('family')).map((family) => ({ family })),
    '/api/people/:id': async () => (await database.db('people').pluck<string[]>('id')).map((id) => ({ id })),
    '/api/public/tags/:tag': async () => (await database.db('tags').pluck<string[]>('number')).map((tag) => ({ tag })),
  };

  test.each(reading)('%s answers', async (name) => {
    const { path, action } = routes[name];
    const as = ROLES.map((role) => server.people[role]).find(({ role }) => mayDo(role, action));
    const nearest = Object.keys(everyOne)
      .filter((one) => path === one || path.startsWith(`${one}/`))
      .sort((a, b) => b.length - a.length)[0];
    const all = path.includes(':') ? await everyOne[nearest ?? '']?.() : [{}];
    // A route to things that the first release did not know has nothing of it to read.
    for (const params of all ?? []) {
      const known = await server.send(name, { params, as });
      expect(known.status, `${path} ${JSON.stringify(params)} ${known.text.slice(0, 300)}`).toBe(200);
    }
  });
});

test('When the work goes on, then the half-mended machine is repaired and a new one goes all the way to its tag', async () => {
  await server.ok('recordRepair', { params: { number: 1 }, as: server.people.technician, body: newRepair(server) });
  const unit = await server.ok('takeInUnit', { as: server.people.technician, body: newUnit() });
  expect(unit.number).toBe(6);
  await mendAndProve(server, unit.number);
  const tag = await server.ok('signOff', { params: { number: 6 }, as: server.people.lead, body: await rulesSeen(server, 6) });
  expect(tag.content.tag).toBe('0006-1');
});

test('When the demo shop starts on it, then it is the same shop, and nobody is added', async () => {
  const accounts = await seedDemoShop(server.deps);
  expect(accounts.map(({ email }) => email).sort()).toEqual(firstRelease.accounts.map(({ email }) => email).sort());
  expect(await countRows()).toMatchObject({ people: before['people'], sheets: before['sheets'] });
  expect(existsSync(join(dataDir, 'demo-accounts.json'))).toBe(true);
});
