import type { z } from 'zod';
import type { signInSchema, User } from '../../../shared/api/sessions.js';
import { findPersonByEmail, holdPerson, type PersonWithPassword } from '../../auth/people-store.js';
import { passwordFits } from '../../auth/password.js';
import { insertSession, revokeSession, revokeSessions } from '../../auth/session-store.js';
import { newToken } from '../../auth/token.js';
import type { Db } from '../../db.js';
import { NotFoundError, NotSignedInError } from '../../errors.js';
import { audit, personSubject } from '../../history/audit.js';
import { refOf } from '../../history/unit-history.js';
import type { IfRefused } from '../../route.js';

const HOUR_MS = 3_600_000;
/** A bench stays signed in for a month, a browser for a long day. */
const LASTS_MS = { bearer: 30 * 24 * HOUR_MS, cookie: 12 * HOUR_MS };

export interface SignedIn {
  token: string;
  user: User;
  expiresAt: Date;
}

interface SignInAttempt {
  request: z.output<typeof signInSchema>;
  from: string;
  now: Date;
  ifRefused: IfRefused;
}

/** The same refusal, in about the same time, for an address that nobody has and for a wrong password. */
export async function signIn(db: Db, { request, from, now, ifRefused }: SignInAttempt): Promise<SignedIn> {
  const found = await findPersonByEmail(db, request.email);
  const fits = await passwordFits(request.password, found?.active ? found.passwordHash : undefined);
  // Held, and looked at again: meanwhile the password may have been changed, or the person deactivated.
  const person = found && (await holdPerson(db, found.user.id, 'as they are'));
  if (!fits || !person?.active || person.passwordHash !== found?.passwordHash) {
    ifRefused((trx) => auditRefusal(trx, person, { from, now }));
    throw new NotSignedInError('The e-mail address or the password is wrong.');
  }
  const token = newToken();
  const expiresAt = new Date(now.getTime() + LASTS_MS[request.keep ?? 'bearer']);
  await insertSession(db, { token, personId: person.user.id, from, createdAt: now, expiresAt });
  const after = { from, expiresAt: expiresAt.toISOString() };
  await audit(db, { who: refOf(person.user), what: 'sign-in.ok', subject: personSubject(person.user), after, at: now });
  return { token, user: person.user, expiresAt };
}

/** Of somebody unknown not even what was typed: many a password is typed into the field for the address. */
async function auditRefusal(trx: Db, person: PersonWithPassword | undefined, { from, now }: { from: string; now: Date }): Promise<void> {
  const subject = person ? personSubject(person.user) : { kind: 'person' as const, id: '', name: 'an address that nobody has' };
  const why = !person
    ? 'unknown'
    : !person.active
      ? 'deactivated'
      : person.passwordHash === undefined
        ? 'no password yet'
        : 'wrong password';
  await audit(trx, { who: undefined, what: 'sign-in.failed', subject, after: { why, from }, at: now });
}

/** One session of somebody's, by its id. Somebody else's id is like one that is not there. */
export async function endSession(
  trx: Db,
  session: { id: string; owner: Pick<User, 'id' | 'name'> },
  { who, now }: { who: User; now: Date },
): Promise<void> {
  const from = await revokeSession(trx, session.owner.id, session.id, now);
  if (from === undefined) throw new NotFoundError('There is no such session, or it has ended.');
  const subject = { kind: 'session' as const, id: session.id, name: `${session.owner.name}, ${from}` };
  await audit(trx, { who: refOf(who), what: 'session.revoked', subject, after: { person: session.owner.id }, at: now });
}

/** Every session of somebody's, or all but that of `but`. */
export async function endSessions(
  trx: Db,
  owner: Pick<User, 'id' | 'name'>,
  { who, now, but }: { who: User; now: Date; but?: string | undefined },
): Promise<number> {
  const ended = await revokeSessions(trx, owner.id, now, but);
  if (ended > 0) {
    const after = { sessionsEnded: ended };
    await audit(trx, { who: refOf(who), what: 'session.revoked', subject: personSubject(owner), after, at: now });
  }
  return ended;
}
