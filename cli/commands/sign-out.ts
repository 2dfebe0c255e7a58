import { joinedBench } from '../bench/joined-bench.js';
import { forgetSignOn, keptSignOn } from '../bench/kept-sign-on.js';
import type { Context } from '../context.js';
import { NotSignedInError, ServerUnreachableError } from '../errors.js';
import { EXIT } from '../exit-codes.js';
import { printJson } from '../render/json.js';
import { forgetSession, readSession } from '../session.js';

/** Ends the session at the server and on this bench. The journal stays. */
export async function runSignOut({ json }: { json?: boolean | undefined }, context: Context): Promise<number> {
  const answer = (signedOut: boolean, revoked: boolean, words: string): void => {
    if (json === true) printJson(context, { signedOut, revoked });
    else if (words !== '') context.stdout.write(`${words}\n`);
  };
  const joined = joinedBench(context.home, context.server);
  if (joined) {
    const standing = keptSignOn(context, joined.bench.id);
    forgetSignOn(context.home);
    const nobody = `Nobody was signed on at ${joined.bench.name}.`;
    answer(standing !== undefined, false, standing ? `${standing.person.name} is signed on no longer.` : nobody);
    return EXIT.good;
  }
  if (!readSession(context.home, context.server)) {
    answer(false, false, 'Nobody is signed in here.');
    return EXIT.good;
  }
  try {
    await (await context.api()).call('signOut');
  } catch (error) {
    // The token is gone from this bench either way; one that the server knows no longer needs no revoking.
    if (error instanceof ServerUnreachableError) {
      forgetSession(context.home);
      answer(true, false, '');
      context.stderr.say('The token is gone from this bench, but the server could not be told: it stays valid there until it runs out.');
      throw error;
    }
    if (!(error instanceof NotSignedInError)) throw error;
  }
  forgetSession(context.home);
  answer(true, true, 'Signed out.');
  return EXIT.good;
}
