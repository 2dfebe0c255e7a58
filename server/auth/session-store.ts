import { v7 as newId } from 'uuid';
import { z } from 'zod';
import { sessionRowSchema, type SessionRow } from '../../shared/api/people.js';
import { userSchema, type User } from '../../shared/api/sessions.js';
import type { Db } from '../db.js';
import { tokenHash } from './token.js';

/** How exactly it is kept when a session was last used: a write a minute at most, however busy the bench. */
const LAST_USED_TO_MS = 60_000;

interface NewSession {
  token: string;
  personId: string;
  /** What it will be known by in lists: `terminal on NAME`, or the kind of browser. */
  from?: string;
  createdAt: Date;
  expiresAt: Date;
}

export async function insertSession(db: Db, session: NewSession): Promise<string> {
  const id = newId();
  await db('sessions').insert({
    id,
    token_hash: tokenHash(session.token),
    person_id: session.personId,
    used_from: session.from ?? 'unknown',
    created_at: session.createdAt,
    expires_at: session.expiresAt,
  });
  return id;
}

const usedSchema = userSchema.extend({ used: z.date().nullable() });

/** Who holds this token: neither revoked nor expired, and somebody who still works here. Remembers that it was used. */
export async function personOfToken(db: Db, token: string, now: Date): Promise<User | undefined> {
  const hash = tokenHash(token);
  const row: unknown = await db('sessions')
    .join('people', 'people.id', 'sessions.person_id')
    .where({ token_hash: hash, active: true })
    .whereNull('revoked_at')
    .where('expires_at', '>', now)
    .first('people.id', 'people.name', 'people.email', 'people.role', 'sessions.last_used_at as used');
  if (row === undefined) return undefined;
  const { used, ...user } = usedSchema.parse(row);
  if (used === null || now.getTime() - used.getTime() >= LAST_USED_TO_MS)
    await db('sessions').where({ token_hash: hash }).update({ last_used_at: now });
  return user;
}

const rowSchema = z
  .object({
    id: z.string(),
    used_from: z.string(),
    created_at: z.date(),
    last_used_at: z.date().nullable(),
    expires_at: z.date(),
    token_hash: z.instanceof(Buffer),
  })
  .transform((row) => ({
    tokenHash: row.token_hash,
    id: row.id,
    from: row.used_from,
    createdAt: row.created_at.toISOString(),
    ...(row.last_used_at === null ? {} : { lastUsedAt: row.last_used_at.toISOString() }),
    expiresAt: row.expires_at.toISOString(),
  }));

const standing = (db: Db, personId: string, now: Date) =>
  db('sessions').where({ person_id: personId }).whereNull('revoked_at').where('expires_at', '>', now);

/** The sessions that somebody could use now, newest first, from behind `after`. `token`: of the one that asks. */
export async function listSessions(
  db: Db,
  personId: string,
  asks: { token: string | undefined; after: string | undefined; limit: number; now: Date },
): Promise<SessionRow[]> {
  const query = standing(db, personId, asks.now).orderBy([
    { column: 'created_at', order: 'desc' },
    { column: 'id', order: 'desc' },
  ]);
  if (asks.after !== undefined) void query.whereRaw('(created_at, id) < (select created_at, id from sessions where id = ?)', [asks.after]);
  const current = asks.token === undefined ? undefined : tokenHash(asks.token);
  return z
    .array(rowSchema)
    .parse(await query.limit(asks.limit))
    .map(({ tokenHash: hash, ...row }) => sessionRowSchema.parse({ ...row, current: current?.equals(hash) ?? false }));
}

/** One session of somebody's, by its id; answers where it was used from, or undefined where they have none such. */
export async function revokeSession(db: Db, personId: string, id: string, now: Date): Promise<string | undefined> {
  const rows: unknown = await standing(db, personId, now).where({ id }).update({ revoked_at: now }).returning('used_from');
  return z.array(z.object({ used_from: z.string() })).parse(rows)[0]?.used_from;
}

/** Every session of somebody's; `but`: except that of this token. Answers how many. */
export async function revokeSessions(db: Db, personId: string, now: Date, but?: string): Promise<number> {
  const query = standing(db, personId, now);
  if (but !== undefined) void query.whereNot({ token_hash: tokenHash(but) });
  return z.number().parse(await query.update({ revoked_at: now }));
}

export async function revokeSessionOfToken(db: Db, token: string, now: Date): Promise<void> {
  await db('sessions')
    .where({ token_hash: tokenHash(token) })
    .whereNull('revoked_at')
    .update({ revoked_at: now });
}

/** Every session of everybody's: a restore would bring back those that were ended since. Answers how many. */
export async function revokeEverySession(db: Db, now: Date): Promise<number> {
  return z.number().parse(await db('sessions').whereNull('revoked_at').where('expires_at', '>', now).update({ revoked_at: now }));
}

export async function deleteExpiredSessions(db: Db, before: Date): Promise<number> {
  return z.number().parse(await db('sessions').where('expires_at', '<', before).delete());
}
