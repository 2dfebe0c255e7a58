import { z } from 'zod';
import type { User } from '../../../shared/api/sessions.js';
import type { Db } from '../../db.js';
import { audit } from '../../history/audit.js';
import { openUnitHistory, refOf, withdrawTag } from '../../history/unit-history.js';
import { endSigningKey, findSigningKey, registerSigningKey } from './signing-key-store.js';
import { loadSigningKey, newSigningKey, type SigningKey } from './signing-key.js';
import { kidOf } from './tag-signature.js';

interface Rotation {
  db: Db;
  dataDir: string;
  now: Date;
  /** Somebody else may have had the key: its standing tags are withdrawn, by this person and for this reason. */
  compromised?: { by: User; reason: string } | undefined;
}

export interface Rotated {
  before: string;
  after: string;
  /** Tags that were withdrawn with the key. */
  withdrawn: string[];
}

/**
 * A new key signs from now on. What a retired key signed is verified as before. What a compromised key signed proves nothing any more:
 * its standing tags are withdrawn, so that stage, page and sale follow, and the units are signed off anew.
 */
export async function rotateSigningKey({ db, dataDir, now, compromised }: Rotation): Promise<Rotated> {
  const old = await loadSigningKey(dataDir);
  const fresh = await newSigningKey(dataDir);
  let withdrawn: string[];
  try {
    withdrawn = await db.transaction((trx) => exchange(trx, old, fresh.key, { now, compromised }));
  } catch (error) {
    fresh.discard();
    throw error;
  }
  // Only now: should this fail, then nothing is signed with the old key all the same, and a second try makes another new one.
  fresh.install();
  return { before: old.kid, after: fresh.key.kid, withdrawn };
}

async function exchange(
  db: Db,
  old: SigningKey,
  fresh: SigningKey,
  { now, compromised }: Pick<Rotation, 'now' | 'compromised'>,
): Promise<string[]> {
  await registerSigningKey(db, old, now);
  await registerSigningKey(db, fresh, now);
  const before = await findSigningKey(db, old.kid);
  const state = compromised ? 'compromised' : 'retired';
  // A second try after a crash: the old key has ended already, and a compromised one never becomes merely retired.
  if (before?.state === 'active' || compromised) {
    await endSigningKey(db, old.kid, compromised ? { state: 'compromised', reason: compromised.reason, now } : { state: 'retired', now });
  }
  await audit(db, {
    who: compromised && refOf(compromised.by),
    what: compromised ? 'key.compromised' : 'key.rotated',
    subject: { kind: 'key', id: old.kid, name: 'signing key' },
    before: { state: before?.state ?? 'active' },
    after: { state, ...(compromised ? { reason: compromised.reason } : {}) },
    at: now,
  });
  return compromised ? withdrawSignedBy(db, old.kid, compromised, now) : [];
}

async function withdrawSignedBy(db: Db, kid: string, { by, reason }: { by: User; reason: string }, now: Date): Promise<string[]> {
  const standing = z
    .array(z.object({ unit: z.number(), number: z.string(), jws: z.string() }))
    .parse(
      await db('tags')
        .join('units', 'units.id', 'tags.unit_id')
        .whereNull('tags.withdrawn_at')
        .orderBy('units.number')
        .select('units.number as unit', 'tags.number as number', 'tags.jws as jws'),
    )
    .filter(({ jws }) => kidOf(jws) === kid);
  for (const { unit } of standing) {
    const history = await openUnitHistory(db, unit);
    if (history.tag)
      await withdrawTag(db, { ...history, tag: history.tag }, { by: refOf(by), reason: `The signing key is compromised: ${reason}`, now });
  }
  return standing.map(({ number }) => number);
}
