import { afterAll, beforeAll, expect, test } from 'vitest';
import { migrate, openDb, type Db } from '../../../server/db.js';
import { migrationSource } from '../../../server/migration-source.js';
import { freshDatabase, type FreshDatabase } from '../../helpers/fresh-database.js';

let fresh: FreshDatabase;
let pools: Db[];

beforeAll(async () => {
  fresh = await freshDatabase({ empty: true });
  pools = Array.from({ length: 3 }, () => openDb(fresh.url));
});
afterAll(async () => {
  await Promise.all(pools.map((pool) => pool.destroy()));
  await fresh.drop();
});

test('When three servers migrate an empty database at once, then each migration is applied once and none of them fails', async () => {
  await Promise.all(pools.map((pool) => migrate(pool)));

  const applied = await fresh.db('knex_migrations').orderBy('id').pluck<string[]>('name');
  expect(applied).toEqual(await migrationSource.getMigrations([]));
});

test('When the database is up to date, then migrating again changes nothing and gives its lock back', async () => {
  const before = await fresh.db('knex_migrations').select('*');

  await migrate(fresh.db);
  await migrate(pools[0] ?? fresh.db);

  expect(await fresh.db('knex_migrations').select('*')).toEqual(before);
  const { rows } = await fresh.db.raw<{ rows: { held: number }[] }>("select count(*) as held from pg_locks where locktype = 'advisory'");
  expect(rows).toEqual([{ held: 0 }]);
});

test('When a count or a date is read, then it is a number and the day as written, and a timestamp is read in UTC', async () => {
  const { rows } = await fresh.db.raw<{ rows: unknown[] }>(
    "select count(*) as counted, date '2026-03-29' as day, timestamptz '2026-03-29 01:30:00+00' as at, current_setting('TimeZone') as zone from generate_series(1, 3)",
  );

  expect(rows).toEqual([{ counted: 3, day: '2026-03-29', at: new Date('2026-03-29T01:30:00Z'), zone: 'UTC' }]);
});

test('When a whole number is too large to hold exactly, then it is refused and not rounded', async () => {
  // 2^53 + 1 is the first whole number that IEEE 754 double precision cannot hold.
  await expect(fresh.db.raw('select 9007199254740993::bigint as large')).rejects.toThrow('9007199254740993');
});
