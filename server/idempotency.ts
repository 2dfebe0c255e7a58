import { createHash } from 'node:crypto';
import { z } from 'zod';
import { canonicalJson } from './canonical-json.js';
import type { Db } from './db.js';
import { ConflictError, InvalidError } from './errors.js';

const KEPT_DAYS = 90;
const KEY_LENGTH_AT_MOST = 200;
export const IDEMPOTENCY_HEADER = 'Idempotency-Key';

export interface StoredAnswer {
  status: number;
  /** The answer's JSON, to the letter. */
  text: string;
}

const rowSchema = z.object({ request_hash: z.instanceof(Buffer), status: z.number(), answer: z.string() });

export function idempotencyKeyOf(header: string | undefined): string {
  const key = header?.trim() ?? '';
  if (key === '')
    throw new InvalidError([
      { pointer: '', reason: `the header ${IDEMPOTENCY_HEADER} is missing: a write that a bench sends carries one` },
    ]);
  if (key.length > KEY_LENGTH_AT_MOST)
    throw new InvalidError([
      { pointer: '', reason: `the header ${IDEMPOTENCY_HEADER} has more than ${String(KEY_LENGTH_AT_MOST)} characters` },
    ]);
  if (!/^[\x21-\x7e]+$/.test(key))
    throw new InvalidError([{ pointer: '', reason: `the header ${IDEMPOTENCY_HEADER} holds more than plain visible characters` }]);
  return key;
}

/**
 * Does the work once for each person and key, and answers alike each time. Runs in the work's own transaction: where that fails,
 * the key is free again. A second request with the same key waits at the unique index until the first one is done.
 */
export async function once(
  trx: Db,
  request: { personId: string; key: string; method: string; path: string; body: unknown; now: Date },
  work: () => Promise<StoredAnswer>,
): Promise<StoredAnswer & { again: boolean }> {
  const { personId, key, now } = request;
  const requestHash = createHash('sha256')
    .update(canonicalJson([request.method, request.path, request.body]))
    .digest();
  const row = { person_id: personId, key };
  const claimed: unknown[] = await trx('idempotency_keys')
    .insert({ ...row, request_hash: requestHash, created_at: now })
    .onConflict(['person_id', 'key'])
    .ignore()
    .returning('key');
  if (claimed.length === 0) {
    const stored = rowSchema.parse(await trx('idempotency_keys').where(row).first());
    if (!stored.request_hash.equals(requestHash)) {
      throw new ConflictError(
        `The ${IDEMPOTENCY_HEADER} was used before with another request.`,
        'Send a new key with a new request, and the old request with its old key.',
      );
    }
    return { status: stored.status, text: stored.answer, again: true };
  }
  const answer = await work();
  await trx('idempotency_keys').where(row).update({ status: answer.status, answer: answer.text });
  return { ...answer, again: false };
}

export async function deleteOldKeys(db: Db, now: Date): Promise<void> {
  await db('idempotency_keys')
    .where('created_at', '<', new Date(now.getTime() - KEPT_DAYS * 86_400_000))
    .delete();
}
