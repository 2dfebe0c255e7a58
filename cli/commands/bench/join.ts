import { createApi } from '../../api/api-client.js';
import { joinedBench, keepBench, keepView, type JoinedBench } from '../../bench/joined-bench.js';
import { reportRigOf } from '../../bench/report-rig.js';
import type { Context } from '../../context.js';
import { NotSignedInError, ServerError } from '../../errors.js';
import { EXIT } from '../../exit-codes.js';
import { firstLineOfInput } from '../../first-line.js';
import { printJson } from '../../render/json.js';
import { forgetSession, readSession } from '../../session.js';
import { forgetSignOn } from '../../bench/kept-sign-on.js';

export interface BenchJoinOptions {
  tokenStdin?: boolean;
  json?: boolean;
}

/** Makes this computer a shared bench: people sign on to it by name and PIN, and nobody's own sign-in stays on it. */
export async function runBenchJoin(options: BenchJoinOptions, context: Context): Promise<number> {
  const { home, server } = context;
  const token = (
    options.tokenStdin === true
      ? await firstLineOfInput(context, { option: '--token-stdin', what: 'token' })
      : await context.prompt.secret({ message: 'The bench’s token', instead: 'give it on standard input with --token-stdin' })
  ).trim();
  const asBench = {
    person: () => undefined,
    remedy: 'A lead or an admin makes a bench, or gives it a new token, on the page Shared benches',
  };
  const api = createApi({ server, token: () => token, bench: asBench, signal: context.interruption.signal });
  const own = await api.call('ownBench').catch((error: unknown) => {
    // Somebody's own token is let in as that person, and then refused here.
    if (error instanceof ServerError && 'status' in error && error.status === 403)
      throw new NotSignedInError(server, 'this is no token of a bench', asBench.remedy);
    throw error;
  });
  const before = joinedBench(home, server);
  if (before && before.bench.id !== own.bench.id) forgetSignOn(home);
  await endOwnSession(context);
  const joined: JoinedBench = { server, bench: own.bench, token };
  keepBench(home, joined);
  keepView(context, own);
  const rig = await reportRigOf(context);
  if (options.json === true) printJson(context, { server, bench: own.bench, shop: own.shop.name, rig: rig?.name ?? null });
  else {
    context.stdout.write(`This computer is the shared bench ${own.bench.name} of ${own.shop.name}, at ${server}.\n`);
    context.stderr.say(
      rig ? `Its rig: ${rig.name}.` : 'It has no rig file yet: rig.yaml in REFETTLE_HOME says which instruments hang on it.',
    );
    context.stderr.say('People sign on by name and PIN when they begin something. A PIN is set in the browser.');
  }
  return EXIT.good;
}

/** What one person may do alone must not lie about on a computer that several use. */
async function endOwnSession(context: Context): Promise<void> {
  const session = readSession(context.home, context.server);
  if (!session) return;
  await (await context.api()).call('signOut').catch((error: unknown) => {
    if (!(error instanceof ServerError)) throw error;
  });
  forgetSession(context.home);
  context.stderr.say(`${session.user.name} was signed in here and no longer is: on a shared bench nobody is by an account of their own.`);
}
