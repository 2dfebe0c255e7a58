import type { User } from '../../shared/api/sessions.js';
import type { Db } from '../db.js';
import { InvalidError, NotSignedInError } from '../errors.js';
import { audit, personSubject } from '../history/audit.js';
import { refOf } from '../history/unit-history.js';
import type { IfRefused } from '../route.js';
import { passwordFits } from './password.js';
import { holdPerson } from './people-store.js';

interface Asked {
  password: string;
  /** Where it stands in the request. */
  pointer: string;
  /** For what it is asked, as the audit log says it. */
  wanted: 'a new password' | 'a PIN';
  now: Date;
  ifRefused: IfRefused;
}

/** The own password, so that an open browser is not enough. A wrong one is refused at its field, and stands in the audit log. */
export async function askOwnPassword(trx: Db, who: User, { password, pointer, wanted, now, ifRefused }: Asked): Promise<void> {
  const person = await holdPerson(trx, who.id, 'for change');
  if (!person?.active) throw new NotSignedInError('The sign-in is no longer good.');
  if (await passwordFits(password, person.passwordHash)) return;
  ifRefused((apart) =>
    audit(apart, { who: refOf(who), what: 'person.wrong-password', subject: personSubject(who), after: { wanted }, at: now }),
  );
  throw new InvalidError([{ pointer, reason: 'is not your password' }]);
}
