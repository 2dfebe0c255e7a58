import { v7 as newId } from 'uuid';
import type { Bench, OwnBench } from '../../../shared/api/benches.js';
import type { User } from '../../../shared/api/sessions.js';
import { findBench, insertBench, newBenchToken, peopleToOffer, revokeBench, setBenchToken, type BenchRef } from '../../auth/bench-store.js';
import type { Db } from '../../db.js';
import { ConflictError, NotFoundError } from '../../errors.js';
import { audit } from '../../history/audit.js';
import { readShop } from '../../history/shop-store.js';
import { refOf } from '../../history/unit-history.js';

async function benchOrNone(db: Db, id: string): Promise<Bench> {
  const bench = await findBench(db, id);
  if (!bench) throw new NotFoundError('There is no such bench.');
  return bench;
}

const subjectOf = ({ id, name }: BenchRef) => ({ kind: 'bench', id, name }) as const;

export async function makeBench(db: Db, name: string, person: User, now: Date): Promise<{ bench: Bench; token: string }> {
  const bench = { id: newId(), name, token: newBenchToken() };
  if (!(await insertBench(db, { ...bench, by: refOf(person), at: now })))
    throw new ConflictError(`A bench is called ${name} already.`, 'Take another name, or give that bench a new token.');
  await audit(db, { who: refOf(person), what: 'bench.made', subject: subjectOf(bench), after: { name }, at: now });
  return { bench: await benchOrNone(db, bench.id), token: bench.token };
}

/** Also brings back a bench that was revoked: the computer is another one, the place and its history are the same. Everybody signs on anew. */
export async function renewToken(db: Db, id: string, person: User, now: Date): Promise<{ bench: Bench; token: string }> {
  const before = await benchOrNone(db, id);
  const token = newBenchToken();
  await setBenchToken(db, id, token);
  const bench = await benchOrNone(db, id);
  await audit(db, {
    who: refOf(person),
    what: 'bench.token-renewed',
    subject: subjectOf(bench),
    before: { revoked: before.revokedAt !== undefined },
    after: { revoked: false },
    at: now,
  });
  return { bench, token };
}

export async function endBench(db: Db, id: string, person: User, now: Date): Promise<Bench> {
  const before = await benchOrNone(db, id);
  if (before.revokedAt !== undefined) return before;
  await revokeBench(db, id, now);
  await audit(db, {
    who: refOf(person),
    what: 'bench.revoked',
    subject: subjectOf(before),
    before: { revoked: false },
    after: { revoked: true },
    at: now,
  });
  return benchOrNone(db, id);
}

export async function ownBench(db: Db, bench: BenchRef): Promise<OwnBench> {
  return { bench, shop: await readShop(db), people: await peopleToOffer(db, bench.id) };
}
