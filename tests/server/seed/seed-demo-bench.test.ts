import { mkdtempSync, readFileSync, rmSync, statSync, unlinkSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterEach, beforeEach, expect, test } from 'vitest';
import { announcement } from '../../../server/announce.js';
import { benchOfToken, revokeBench } from '../../../server/auth/bench-store.js';
import { hashPin } from '../../../server/auth/password.js';
import { setPin } from '../../../server/auth/pin-store.js';
import { findPersonByEmail } from '../../../server/auth/people-store.js';
import { readConfig } from '../../../server/config.js';
import { signOnAtBench } from '../../../server/features/benches/sign-on-service.js';
import { seedDemoBench } from '../../../server/seed/seed-demo-bench.js';
import { seedDemoShop } from '../../../server/seed/seed-demo-shop.js';
import { freshDatabase, type FreshDatabase } from '../../helpers/fresh-database.js';

let fresh: FreshDatabase;
let dataDir: string;
const now = new Date('2026-03-05T09:00:00Z');
beforeEach(async () => {
  fresh = await freshDatabase();
  dataDir = mkdtempSync(join(tmpdir(), 'refettle-seed-'));
  await seedDemoShop(deps());
});
afterEach(async () => {
  await fresh.drop();
  rmSync(dataDir, { recursive: true, force: true });
});

const deps = () => ({ db: fresh.db, config: readConfig({ REFETTLE_DATA: dataDir, DATABASE_URL: fresh.url }), clock: () => now });
const seed = () => seedDemoBench(deps());
const path = () => join(dataDir, 'demo-bench.json');

test('When the demo bench is made, then its token and the PINs let people in, and its owner alone reads the file', async () => {
  const access = await seed();
  expect(access.bench).toBe('bench-1');
  expect(access.pins.map(({ name }) => name)).toEqual(['Wil Tarrow', 'Maren Holt', 'Tamsin Oake']);
  expect(statSync(path()).mode & 0o777).toBe(0o600);
  expect(JSON.parse(readFileSync(path(), 'utf8'))).toEqual(access);
  const bench = await benchOfToken(fresh.db, access.token, now);
  expect(bench?.name).toBe('bench-1');
  for (const { name, pin } of access.pins) {
    expect(pin).toMatch(/^\d{4}$/);
    if (bench)
      expect((await signOnAtBench(fresh.db, bench, { name, pin }, { now, ifRefused: () => expect.unreachable() })).person.name).toBe(name);
  }
});

test('When the server starts again, then token and PINs are the same; a bench that was revoked stays so', async () => {
  const first = await seed();
  expect(await seed()).toEqual(first);
  const bench = await benchOfToken(fresh.db, first.token, now);
  await revokeBench(fresh.db, bench?.id ?? '', now);
  await seed();
  expect(await benchOfToken(fresh.db, first.token, now)).toBeUndefined();
});

test('When somebody has set a PIN since, then it is theirs and no longer told', async () => {
  const first = await seed();
  const wil = await findPersonByEmail(fresh.db, 'wil@millrace.example');
  if (wil) await setPin(fresh.db, wil.user.id, await hashPin('40719'), wil.user, new Date(now.getTime() + 1));
  const again = await seed();
  expect(again.pins).toEqual(first.pins.filter(({ name }) => name !== 'Wil Tarrow'));
});

test('When the file was lost, then the bench gets a new token and people new PINs', async () => {
  const first = await seed();
  unlinkSync(path());
  const again = await seed();
  expect(again.token).not.toBe(first.token);
  expect(await benchOfToken(fresh.db, first.token, now)).toBeUndefined();
  expect(again.pins).toHaveLength(3);
});

test('When the start says how to get in, then the bench’s token and its people’s PINs are among it', async () => {
  const access = await seed();
  const places = { address: 'http://127.0.0.1:4780', network: [], publicAddress: undefined };
  const words = announcement(deps().config, places, [], undefined, access);
  expect(words).toContain(access.token);
  for (const { name, pin } of access.pins) expect(words).toContain(`${name} ${pin}`);
});
