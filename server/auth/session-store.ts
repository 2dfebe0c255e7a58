import { z } from 'zod';
import { userSchema, type User } from '../../shared/api/sessions.js';
import type { Db } from '../db.js';
import { tokenHash } from './token.js';

export async function insertSession(db: Db, session: { token: string; personId: string; createdAt: Date; expiresAt: Date }): Promise<void> {
  await db('sessions').insert({
    token_hash: tokenHash(session.token),
    person_id: session.personId,
    created_at: session.createdAt,
    expires_at: session.expiresAt,
  });
}

/** Who holds this token: neither revoked nor expired, and somebody who still works here. */
export async function personOfToken(db: Db, token: string, now: Date): Promise<User | undefined> {
  const row: unknown = await db('sessions')
    .join('people', 'people.id', 'sessions.person_id')
    .where({ token_hash: tokenHash(token), active: true })
    .whereNull('revoked_at')
    .where('expires_at', '>', now)
    .first('people.id', 'people.name', 'people.email', 'people.role');
  return row === undefined ? undefined : userSchema.parse(row);
}

export async function revokeSession(db: Db, token: string, now: Date): Promise<void> {
  await db('sessions')
    .where({ token_hash: tokenHash(token) })
    .whereNull('revoked_at')
    .update({ revoked_at: now });
}

export async function deleteExpiredSessions(db: Db, before: Date): Promise<number> {
  return z.number().parse(await db('sessions').where('expires_at', '<', before).delete());
}
