import type { PinState } from '../../../shared/api/benches.js';
import type { User } from '../../../shared/api/sessions.js';
import { askOwnPassword } from '../../auth/own-password.js';
import { hashPin } from '../../auth/password.js';
import { clearPin, findPinState, setPin } from '../../auth/pin-store.js';
import type { Db } from '../../db.js';
import { NotFoundError, RoleError } from '../../errors.js';
import { audit, personSubject } from '../../history/audit.js';
import { refOf } from '../../history/unit-history.js';
import type { IfRefused } from '../../route.js';

export async function pinStateOf(db: Db, personId: string): Promise<PinState> {
  const state = await findPinState(db, personId);
  if (!state) throw new NotFoundError('Nobody who works here has this id.');
  return state;
}

export async function setOwnPin(
  db: Db,
  person: User,
  { password, pin }: { password: string; pin: string },
  { now, ifRefused }: { now: Date; ifRefused: IfRefused },
): Promise<PinState> {
  await askOwnPassword(db, person, { password, pointer: '/password', wanted: 'a PIN', now, ifRefused });
  return putPin(db, person.id, pin, person, now);
}

/** Whose PIN somebody else sets, that one could act for at a bench: it stands in the audit log, and beside the PIN. */
export async function putPinOfAnother(db: Db, personId: string, pin: string, by: User, now: Date): Promise<PinState> {
  if (personId === by.id)
    throw new RoleError('Your own PIN is set on your account page, with your password: an open browser must not be enough.');
  return putPin(db, personId, pin, by, now);
}

async function putPin(db: Db, personId: string, pin: string, by: User, now: Date): Promise<PinState> {
  const before = await pinStateOf(db, personId);
  await setPin(db, personId, await hashPin(pin), refOf(by), now);
  await audit(db, {
    who: refOf(by),
    what: 'pin.set',
    subject: personSubject(before.person),
    before: { set: before.pinSetAt !== undefined },
    after: { set: true, own: by.id === personId },
    at: now,
  });
  return pinStateOf(db, personId);
}

export async function takePinAway(db: Db, personId: string, by: User, now: Date): Promise<PinState> {
  const before = await pinStateOf(db, personId);
  if (before.pinSetAt === undefined) return before;
  await clearPin(db, personId);
  await audit(db, {
    who: refOf(by),
    what: 'pin.cleared',
    subject: personSubject(before.person),
    before: { set: true },
    after: { set: false },
    at: now,
  });
  return pinStateOf(db, personId);
}
