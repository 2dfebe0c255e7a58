import type { PersonRef } from '../../shared/history/events.js';
import type { Context } from '../context.js';
import { personOf, whoIsHere } from '../session.js';

/** What somebody signs on for. */
export type SignOnWhen = 'start' | 'resume';

/**
 * Who does the work that begins now. Refuses (NotSignedInError) where nobody is signed in.
 * On a bench of one's own it is who is signed in.
 */
export async function signOn(context: Context, _when: SignOnWhen): Promise<PersonRef> {
  return personOf((await whoIsHere(context)).user);
}
