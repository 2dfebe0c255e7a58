import type { z } from 'zod';
import type { signInSchema, User } from '../../../shared/api/sessions.js';
import { findPersonByEmail } from '../../auth/people-store.js';
import { passwordFits } from '../../auth/password.js';
import { insertSession } from '../../auth/session-store.js';
import { newToken } from '../../auth/token.js';
import type { Db } from '../../db.js';
import { NotSignedInError } from '../../errors.js';

const HOUR_MS = 3_600_000;
/** A bench stays signed in for a month, a browser for a long day. */
const LASTS_MS = { bearer: 30 * 24 * HOUR_MS, cookie: 12 * HOUR_MS };

export interface SignedIn {
  token: string;
  user: User;
  expiresAt: Date;
}

/** The same refusal, in about the same time, for an address that nobody has and for a wrong password. */
export async function signIn(db: Db, request: z.output<typeof signInSchema>, now: Date): Promise<SignedIn> {
  const person = await findPersonByEmail(db, request.email);
  const fits = await passwordFits(request.password, person?.active ? person.passwordHash : undefined);
  if (!fits || !person) throw new NotSignedInError('The e-mail address or the password is wrong.');
  const token = newToken();
  const expiresAt = new Date(now.getTime() + LASTS_MS[request.keep ?? 'bearer']);
  await insertSession(db, { token, personId: person.user.id, createdAt: now, expiresAt });
  return { token, user: person.user, expiresAt };
}
