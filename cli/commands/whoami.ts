import { benchView, joinedBench, type JoinedBench } from '../bench/joined-bench.js';
import { keptSignOn } from '../bench/kept-sign-on.js';
import type { Context } from '../context.js';
import { EXIT } from '../exit-codes.js';
import { printJson } from '../render/json.js';
import { timeText } from '../render/words.js';
import { whoIsSignedIn } from '../session.js';

interface WhoamiOptions {
  json?: boolean | undefined;
}

/** Who is signed in here; on a shared bench, which bench it is and who stands at it. Asks nobody for a PIN. */
export async function runWhoami(options: WhoamiOptions, context: Context): Promise<number> {
  const joined = joinedBench(context.home, context.server);
  if (joined) return whoStands(options, context, joined);
  const { user, shop, offline } = await whoIsSignedIn(context);
  if (options.json === true) printJson(context, { server: context.server, offline, user, shop });
  else {
    context.stdout.write(`${user.name}, ${user.role}, ${user.email}\n${shop.name}, at ${context.server}\n`);
    if (offline) sayOffline(context);
  }
  return EXIT.good;
}

async function whoStands({ json }: WhoamiOptions, context: Context, { bench }: JoinedBench): Promise<number> {
  const { shop, offline } = await benchView(context);
  const standing = keptSignOn(context, bench.id);
  if (json === true) {
    const until = standing ? { until: standing.until.toISOString() } : {};
    printJson(context, { server: context.server, offline, bench, user: standing?.person ?? null, ...until, shop });
    return EXIT.good;
  }
  const who = standing
    ? `${standing.person.name}, ${standing.person.role}, signed on until ${timeText(standing.until.toISOString())} unless going on`
    : 'Nobody is signed on: whoever begins something is asked';
  context.stdout.write(`${who}\n${bench.name}, a shared bench of ${shop.name}, at ${context.server}\n`);
  if (offline) sayOffline(context);
  return EXIT.good;
}

const sayOffline = ({ stderr }: Context): void => stderr.say('The server can’t be reached now; this is from last time.');
