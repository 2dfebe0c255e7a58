import type { z } from 'zod';
import { signOnSchema, type signedOnSchema } from '../../../shared/api/benches.js';
import { mayDo } from '../../../shared/api/roles.js';
import { noteSignOn, personAtBench, type BenchRef } from '../../auth/bench-store.js';
import { hashPin, pinFits } from '../../auth/password.js';
import { findPersonWithPin } from '../../auth/pin-store.js';
import type { Db } from '../../db.js';
import { InvalidError, RoleError } from '../../errors.js';
import { audit } from '../../history/audit.js';
import type { IfRefused } from '../../route.js';
import { textFaults } from '../../request-faults.js';

/** Whom a sign-on is about, for counting its wrong tries: a person's id, or what was typed where nobody is that. */
export async function whoSignsOn(db: Db, body: unknown): Promise<string> {
  const asked = signOnSchema.safeParse(body);
  if (!asked.success || textFaults(asked.data, '').length > 0) return '';
  const person = await findPersonWithPin(db, asked.data);
  return person?.person.id ?? (asked.data.person ?? asked.data.name ?? '').toLowerCase();
}

/**
 * Somebody stands at a shared bench: by name and PIN. The same refusal, in about the same time, for a name that nobody has, for somebody
 * without a PIN and for a wrong PIN.
 */
export async function signOnAtBench(
  db: Db,
  bench: BenchRef,
  request: z.output<typeof signOnSchema>,
  { now, ifRefused }: { now: Date; ifRefused: IfRefused },
): Promise<z.input<typeof signedOnSchema>> {
  if (request.person === undefined && request.name === undefined)
    throw new InvalidError([{ pointer: '/name', reason: 'say who signs on: a name, or the id of somebody the bench has seen' }]);
  const found = await findPersonWithPin(db, request);
  const fits = await pinFits(request.pin, found?.pinHash);
  if (!fits || !found) {
    // Whom it was tried for stands beside it; of what nobody is called, nothing: a PIN may have been typed there.
    const after = found ? { name: found.person.name, person: found.person.id, why: 'wrong PIN' } : { why: 'nobody, or no PIN' };
    ifRefused((trx) => audit(trx, { who: undefined, what: 'bench.sign-on-failed', subject: { kind: 'bench', ...bench }, after, at: now }));
    throw new InvalidError([
      {
        pointer: '/pin',
        reason: 'the name or the PIN is wrong, or no PIN is set. Where two have the same name, the e-mail address tells them apart',
      },
    ]);
  }
  const { person, pinSetAt } = found;
  if (!mayDo(person.role, 'run.record'))
    throw new RoleError(`A bench is for technicians and leads; ${person.name} is signed on nowhere, being ${person.role}.`);
  const isNew = (await personAtBench(db, bench.id, person.id)) === undefined;
  await noteSignOn(db, bench.id, person.id, now);
  // From now on the bench may act in this person's name.
  if (isNew) await audit(db, { who: person, what: 'bench.first-sign-on', subject: { kind: 'bench', ...bench }, at: now });
  // A hash of its own: what a bench keeps says nothing of what the server keeps, nor of what other benches do.
  return { person: { ...person, pinSetAt }, verifier: await hashPin(request.pin) };
}
