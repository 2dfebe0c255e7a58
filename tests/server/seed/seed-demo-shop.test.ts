import { mkdtempSync, readFileSync, rmSync, statSync, unlinkSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterEach, beforeEach, expect, test } from 'vitest';
import type { Config } from '../../../server/config.js';
import { signIn } from '../../../server/features/sessions/sessions-service.js';
import { EMPTY_SHOP, insertShop } from '../../../server/history/shop-store.js';
import { seedDemoShop } from '../../../server/seed/seed-demo-shop.js';
import { SetUpError } from '../../../server/set-up-error.js';
import { freshDatabase, type FreshDatabase } from '../../helpers/fresh-database.js';

let fresh: FreshDatabase;
let dataDir: string;
let config: Config;
const now = new Date('2026-03-05T09:00:00Z');
beforeEach(async () => {
  fresh = await freshDatabase();
  dataDir = mkdtempSync(join(tmpdir(), 'refettle-seed-'));
  config = {
    host: '127.0.0.1',
    port: 4780,
    dataDir,
    databaseUrl: fresh.url,
    demo: true,
    publicUrl: undefined,
    tls: undefined,
    trustedProxies: ['loopback'],
    publicListener: undefined,
  };
});
afterEach(async () => {
  await fresh.drop();
  rmSync(dataDir, { recursive: true, force: true });
});

const seed = () => seedDemoShop({ db: fresh.db, config, clock: () => now });
const signInTo = (db: FreshDatabase['db'], request: { email: string; password: string }) =>
  signIn(db, { request, from: 'a test', now, ifRefused: () => undefined });
const path = () => join(dataDir, 'demo-accounts.json');
const counts = async () => {
  const count = async (table: string): Promise<number> => Number((await fresh.db(table).count('* as n').first())?.['n']);
  return { people: await count('people'), sheets: await count('sheets'), units: await count('units'), shop: await count('shop') };
};

test('When the demo shop is made, then the file holds one account a role, its owner alone reads it, and each can sign in', async () => {
  const accounts = await seed();

  expect(accounts.map(({ role }) => role).sort()).toEqual(['admin', 'lead', 'sales', 'technician']);
  expect(JSON.parse(readFileSync(path(), 'utf8'))).toEqual(accounts); // contract, section 8: [{"role","email","password"}]
  expect(Object.keys(accounts[0] ?? {}).sort()).toEqual(['email', 'password', 'role']);
  expect(statSync(path()).mode & 0o777).toBe(0o600);
  for (const { role, email, password } of accounts) {
    expect((await signInTo(fresh.db, { email, password })).user).toMatchObject({ role, email });
  }
  expect(new Set(accounts.map(({ password }) => password)).size).toBe(4);
  expect(await counts()).toEqual({ people: 5, sheets: 1, units: 3, shop: 1 });
  expect(await fresh.db('units').orderBy('number').select('number', 'maker', 'licensed_only', 'stage')).toEqual([
    { number: 1, maker: 'Brindle', licensed_only: false, stage: 'intake' },
    { number: 2, maker: 'Brindle', licensed_only: false, stage: 'intake' },
    { number: 3, maker: 'Oakhithe', licensed_only: true, stage: 'intake' },
  ]);
});

test('When the server starts again, then nothing is made twice and the passwords are the same', async () => {
  const first = await seed();
  const before = await counts();
  expect(await seed()).toEqual(first);
  expect(await counts()).toEqual(before);
});

test('When the file was lost, then the accounts get new passwords, and sessions under the old ones end', async () => {
  const first = await seed();
  const lead = first.find(({ role }) => role === 'lead');
  await signInTo(fresh.db, { email: lead?.email ?? '', password: lead?.password ?? '' });
  unlinkSync(path());

  const second = await seed();
  const fresher = second.find(({ role }) => role === 'lead');
  expect(fresher?.password).not.toBe(lead?.password);
  await expect(signInTo(fresh.db, { email: lead?.email ?? '', password: lead?.password ?? '' })).rejects.toThrow();
  await signInTo(fresh.db, { email: fresher?.email ?? '', password: fresher?.password ?? '' });
  expect(await fresh.db('sessions').whereNull('revoked_at').count('* as n')).toEqual([{ n: 1 }]);
});

test('When the database is new and the file is old, then the passwords of the file hold', async () => {
  const first = await seed();
  const other = await freshDatabase();
  expect(await seedDemoShop({ db: other.db, config, clock: () => now })).toEqual(first);
  const { email, password } = first[0] ?? { email: '', password: '' };
  await signInTo(other.db, { email, password });
  await other.drop();
});

test('When the database holds a shop of its own, then nothing of the demo gets into it', async () => {
  await insertShop(fresh.db, EMPTY_SHOP);
  await expect(seed()).rejects.toThrow(SetUpError);
  expect(await counts()).toEqual({ people: 0, sheets: 0, units: 0, shop: 1 });
});
