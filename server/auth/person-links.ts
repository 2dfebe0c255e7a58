import { z } from 'zod';
import { linkKindSchema, type LinkKind } from '../../shared/api/people.js';
import type { Db } from '../db.js';
import { newToken, tokenHash } from './token.js';

const HOUR_MS = 3_600_000;
/** Long enough for somebody who begins next Monday; a forgotten password is wanted the same day. */
const LASTS_MS: Record<LinkKind, number> = { invitation: 7 * 24 * HOUR_MS, reset: 24 * HOUR_MS };

const linkSchema = z
  .object({ person_id: z.string(), kind: linkKindSchema, expires_at: z.date() })
  .transform((row) => ({ personId: row.person_id, kind: row.kind, expiresAt: row.expires_at }));
export type PersonLink = z.output<typeof linkSchema>;

/** A new link for somebody; the one before no longer opens. Only the hash is kept: this is the one time that the token is seen. */
export async function makeLink(
  db: Db,
  link: { personId: string; kind: LinkKind; madeBy: string; now: Date },
): Promise<{ token: string; expiresAt: Date }> {
  const token = newToken();
  const expiresAt = new Date(link.now.getTime() + LASTS_MS[link.kind]);
  await deleteLinks(db, link.personId);
  await db('person_links').insert({
    token_hash: tokenHash(token),
    person_id: link.personId,
    kind: link.kind,
    made_by: link.madeBy,
    created_at: link.now,
    expires_at: expiresAt,
  });
  return { token, expiresAt };
}

export async function findLink(db: Db, token: string, now: Date): Promise<PersonLink | undefined> {
  const row: unknown = await db('person_links')
    .where({ token_hash: tokenHash(token) })
    .where('expires_at', '>', now)
    .first();
  return row === undefined ? undefined : linkSchema.parse(row);
}

/** True once a link: two who use it at the same moment get one yes between them. */
export async function useLink(db: Db, token: string, now: Date): Promise<boolean> {
  const used: unknown = await db('person_links')
    .where({ token_hash: tokenHash(token) })
    .where('expires_at', '>', now)
    .delete();
  return used === 1;
}

export async function deleteLinks(db: Db, personId: string): Promise<void> {
  await db('person_links').where({ person_id: personId }).delete();
}

/** Whoever is no admin any more leaves no way in behind: a link in their hands would open another account, an admin's too. */
export async function deleteLinksMadeBy(db: Db, personId: string): Promise<number> {
  return z.number().parse(await db('person_links').where({ made_by: personId }).delete());
}

/** Answers how many could still have been used. */
export async function deleteEveryLink(db: Db, now: Date): Promise<number> {
  await deleteExpiredLinks(db, now);
  return z.number().parse(await db('person_links').delete());
}

export async function deleteExpiredLinks(db: Db, now: Date): Promise<void> {
  await db('person_links').where('expires_at', '<=', now).delete();
}
