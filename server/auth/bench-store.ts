import { z } from 'zod';
import { benchRigSchema, type Bench, type BenchPerson, type BenchRig } from '../../shared/api/benches.js';
import { roleSchema } from '../../shared/api/roles.js';
import { userSchema, type User } from '../../shared/api/sessions.js';
import type { PersonRef } from '../../shared/history/events.js';
import type { Db } from '../db.js';
import { nameKey } from './name-key.js';
import { newToken, tokenHash } from './token.js';

/** Tells a bench's token from a person's at a glance, in a file and in a log of leaked secrets. */
const BENCH_TOKEN_PREFIX = 'bench_';
/** To the minute is enough to see whether a bench is alive, and one write a minute is little. */
const SEEN_EVERY_MS = 60_000;

export interface BenchRef {
  id: string;
  name: string;
}

export const newBenchToken = (): string => `${BENCH_TOKEN_PREFIX}${newToken()}`;
export const isBenchToken = (token: string): boolean => token.startsWith(BENCH_TOKEN_PREFIX);

/** The bench that holds this token; undefined where it was revoked or renewed. */
export async function benchOfToken(db: Db, token: string, now: Date): Promise<BenchRef | undefined> {
  const row: unknown = await db('benches')
    .where({ token_hash: tokenHash(token) })
    .first('id', 'name', 'last_seen_at');
  if (row === undefined) return undefined;
  const { last_seen_at: seenAt, ...bench } = z.object({ id: z.string(), name: z.string(), last_seen_at: z.date().nullable() }).parse(row);
  if (seenAt === null || now.getTime() - seenAt.getTime() >= SEEN_EVERY_MS)
    await db('benches').where({ id: bench.id }).update({ last_seen_at: now });
  return bench;
}

/** Somebody who has signed on at this bench at some time, and whether that person still works here. */
export async function personAtBench(db: Db, benchId: string, personId: string): Promise<{ user: User; active: boolean } | undefined> {
  if (!z.uuid().safeParse(personId).success) return undefined;
  const row: unknown = await db('bench_people')
    .join('people', 'people.id', 'bench_people.person_id')
    .where({ bench_id: benchId, person_id: personId })
    .first('people.id', 'people.name', 'people.email', 'people.role', 'people.active');
  if (row === undefined) return undefined;
  const { active, ...user } = userSchema.extend({ active: z.boolean() }).parse(row);
  return { user, active };
}

const seenSchema = z
  .object({ bench_id: z.string(), id: z.string(), name: z.string(), role: roleSchema, last_signed_on_at: z.date() })
  .transform((row) => ({
    benchId: row.bench_id,
    person: { id: row.id, name: row.name, role: row.role, lastSignedOnAt: row.last_signed_on_at.toISOString() },
  }));

async function peopleOf(db: Db, benchIds: readonly string[]): Promise<Map<string, Bench['people']>> {
  const people = new Map<string, Bench['people']>(benchIds.map((id) => [id, []]));
  const rows = z.array(seenSchema).parse(
    await db('bench_people')
      .join('people', 'people.id', 'bench_people.person_id')
      .whereIn('bench_id', [...benchIds])
      .where({ active: true })
      .orderBy('last_signed_on_at', 'desc')
      .select('bench_id', 'people.id', 'people.name', 'people.role', 'last_signed_on_at'),
  );
  for (const { benchId, person } of rows) people.get(benchId)?.push(person);
  return people;
}

const benchRowSchema = z.object({
  id: z.string(),
  name: z.string(),
  made_at: z.date(),
  made_by: z.string(),
  made_by_name: z.string(),
  made_by_role: roleSchema,
  last_seen_at: z.date().nullable(),
  revoked_at: z.date().nullable(),
  rig: benchRigSchema.nullable(),
  rig_reported_at: z.date().nullable(),
});

const benchRows = (db: Db) =>
  db('benches').join('people as maker', 'maker.id', 'benches.made_by').select('benches.*', 'maker.name as made_by_name');

async function benchesOf(db: Db, found: unknown): Promise<Bench[]> {
  const rows = z.array(benchRowSchema).parse(found);
  const people = await peopleOf(
    db,
    rows.map(({ id }) => id),
  );
  return rows.map((row) => ({
    id: row.id,
    name: row.name,
    madeAt: row.made_at.toISOString(),
    madeBy: { id: row.made_by, name: row.made_by_name, role: row.made_by_role },
    ...(row.last_seen_at ? { lastSeenAt: row.last_seen_at.toISOString() } : {}),
    ...(row.revoked_at ? { revokedAt: row.revoked_at.toISOString() } : {}),
    ...(row.rig ? { rig: row.rig } : {}),
    ...(row.rig_reported_at ? { rigReportedAt: row.rig_reported_at.toISOString() } : {}),
    people: people.get(row.id) ?? [],
  }));
}

/** In the order in which they were made, from behind `after`. */
export async function listBenches(db: Db, after: string | undefined, limit: number): Promise<Bench[]> {
  const query = benchRows(db).orderBy('benches.id').limit(limit);
  if (after !== undefined) void query.where('benches.id', '>', after);
  return benchesOf(db, await query);
}

export async function findBench(db: Db, id: string): Promise<Bench | undefined> {
  return (await benchesOf(db, await benchRows(db).where('benches.id', id)))[0];
}

/** False where a bench has this name already. */
export async function insertBench(db: Db, bench: { id: string; name: string; token: string; by: PersonRef; at: Date }): Promise<boolean> {
  const inserted: unknown[] = await db('benches')
    .insert({
      id: bench.id,
      name: bench.name.trim(),
      name_key: nameKey(bench.name),
      token_hash: tokenHash(bench.token),
      made_at: bench.at,
      made_by: bench.by.id,
      made_by_role: bench.by.role,
    })
    .onConflict('name_key')
    .ignore()
    .returning('id');
  return inserted.length > 0;
}

/**
 * A new token for a bench, revoked or not: the old one is gone for good. Whoever holds the new one acts for nobody until somebody signs on
 * again; else a lead could renew a token and work in a technician's name.
 */
export async function setBenchToken(db: Db, id: string, token: string): Promise<void> {
  await db('bench_people').where({ bench_id: id }).delete();
  await db('benches')
    .where({ id })
    .update({ token_hash: tokenHash(token), revoked_at: null });
}

export async function revokeBench(db: Db, id: string, now: Date): Promise<void> {
  await db('benches').where({ id }).whereNull('revoked_at').update({ token_hash: null, revoked_at: now });
}

/** Every bench's token; answers the names of those that had one. */
export async function revokeEveryBench(db: Db, now: Date): Promise<string[]> {
  const revoked: unknown = await db('benches').whereNotNull('token_hash').update({ token_hash: null, revoked_at: now }).returning('name');
  return z
    .array(z.object({ name: z.string() }))
    .parse(revoked)
    .map(({ name }) => name)
    .sort();
}

export async function setBenchRig(db: Db, id: string, rig: BenchRig, now: Date): Promise<void> {
  await db('benches')
    .where({ id })
    .update({ rig: JSON.stringify(rig), rig_reported_at: now });
}

export async function noteSignOn(db: Db, benchId: string, personId: string, now: Date): Promise<void> {
  await db('bench_people')
    .insert({ bench_id: benchId, person_id: personId, first_signed_on_at: now, last_signed_on_at: now })
    .onConflict(['bench_id', 'person_id'])
    .merge(['last_signed_on_at']);
}

/** Whatever this transaction puts into histories, captures and runs is noted as recorded at this bench: by the default of their columns. */
export async function recordAtBench(trx: Db, bench: BenchRef): Promise<void> {
  await trx.raw("select set_config('refettle.bench', ?, true)", [bench.id]);
}

/** Whom a bench may offer at sign-on: those it has seen, who still work here and have a PIN. */
export async function peopleToOffer(db: Db, benchId: string): Promise<BenchPerson[]> {
  const rows = await db('bench_people')
    .join('people', 'people.id', 'bench_people.person_id')
    .where({ bench_id: benchId, active: true })
    .whereNotNull('pin_hash')
    .orderBy('last_signed_on_at', 'desc')
    .select('people.id', 'people.name', 'people.role', 'people.pin_set_at');
  return z
    .array(z.object({ id: z.string(), name: z.string(), role: roleSchema, pin_set_at: z.date() }))
    .parse(rows)
    .map(({ pin_set_at: at, ...person }) => ({ ...person, pinSetAt: at.toISOString() }));
}
