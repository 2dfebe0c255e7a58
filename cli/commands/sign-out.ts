import type { Context } from '../context.js';
import { NotSignedInError, ServerUnreachableError } from '../errors.js';
import { EXIT } from '../exit-codes.js';
import { forgetSession, readSession } from '../session.js';

/** Ends the session at the server and on this bench. The journal stays. */
export async function runSignOut(_options: object, context: Context): Promise<number> {
  if (!readSession(context.home, context.server)) {
    context.stdout.write('Nobody is signed in here.\n');
    return EXIT.good;
  }
  try {
    await (await context.api()).call('signOut');
  } catch (error) {
    // The token is gone from this bench either way; one that the server knows no longer needs no revoking.
    if (error instanceof ServerUnreachableError) {
      forgetSession(context.home);
      context.stderr.say('The token is gone from this bench, but the server could not be told: it stays valid there until it runs out.');
      throw error;
    }
    if (!(error instanceof NotSignedInError)) throw error;
  }
  forgetSession(context.home);
  context.stdout.write('Signed out.\n');
  return EXIT.good;
}
