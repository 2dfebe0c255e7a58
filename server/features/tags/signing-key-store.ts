import { createPublicKey, type KeyObject } from 'node:crypto';
import { z } from 'zod';
import type { PublicKeys } from '../../../shared/api/tags.js';
import type { Db } from '../../db.js';
import { ConflictError } from '../../errors.js';
import type { SigningKey } from './signing-key.js';

const rowSchema = z.object({
  kid: z.string(),
  x: z.string(),
  state: z.enum(['active', 'retired', 'compromised']),
  created_at: z.date(),
  ended_at: z.date().nullable(),
  reason: z.string().nullable(),
});
type KeyRow = z.output<typeof rowSchema>;

/** RFC 8037: an Ed25519 public key as a JWK. */
const jwkOf = (x: string) => ({ kty: 'OKP', crv: 'Ed25519', x }) as const;

/** Keeps the public half; does nothing where it is known. */
export async function registerSigningKey(db: Db, key: SigningKey, now: Date): Promise<void> {
  const { x } = key.publicKey.export({ format: 'jwk' });
  await db('signing_keys').insert({ kid: key.kid, x, state: 'active', created_at: now }).onConflict('kid').ignore();
}

export async function findSigningKey(db: Db, kid: string): Promise<(KeyRow & { publicKey: KeyObject }) | undefined> {
  const found: unknown = await db('signing_keys').where({ kid }).first();
  if (found === undefined) return undefined;
  const row = rowSchema.parse(found);
  return { ...row, publicKey: createPublicKey({ key: jwkOf(row.x), format: 'jwk' }) };
}

/** Before a tag is signed: the key must be one that others will believe. Locked, so that no rotation passes in between. */
export async function refuseEndedKey(db: Db, key: SigningKey, now: Date): Promise<void> {
  await registerSigningKey(db, key, now);
  const { state } = rowSchema.parse(await db('signing_keys').where({ kid: key.kid }).forShare().first());
  if (state === 'active') return;
  throw new ConflictError(
    `Nothing can be signed: the key on the server was ${state === 'retired' ? 'retired' : 'withdrawn as compromised'}.`,
    'An admin runs npm run rotate-key on the server, which makes a new one.',
  );
}

export async function endSigningKey(
  db: Db,
  kid: string,
  end: { state: 'retired'; now: Date } | { state: 'compromised'; reason: string; now: Date },
): Promise<void> {
  await db('signing_keys')
    .where({ kid })
    .update({ state: end.state, ended_at: end.now, reason: end.state === 'compromised' ? end.reason : null });
}

/** A JWK Set (RFC 7517) of every key whose signatures still say something: what a compromised one signed, anybody may have signed. */
export async function publicKeys(db: Db): Promise<PublicKeys> {
  const rows = z
    .array(rowSchema)
    .parse(await db('signing_keys').whereNot({ state: 'compromised' }).orderBy('created_at', 'desc').orderBy('kid'));
  return { keys: rows.map(({ kid, x }) => ({ ...jwkOf(x), kid, use: 'sig', alg: 'EdDSA' })) };
}
