import { forgetBench } from '../../bench/joined-bench.js';
import type { Context } from '../../context.js';
import { EXIT } from '../../exit-codes.js';
import { waitingEntries } from '../../journal/outbox.js';
import { printJson } from '../../render/json.js';
import { plural } from '../../render/words.js';
import { neededBench } from './show.js';

/** This computer is no shared bench any more: its token and what it knows of people's PINs are gone from it. The journal stays. */
export async function runBenchLeave({ json }: { json?: boolean }, context: Context): Promise<number> {
  const { bench, server } = neededBench(context);
  const { entries } = waitingEntries(context.home);
  forgetBench(context.home);
  if (json === true) printJson(context, { server, left: bench, waiting: entries.length });
  else context.stdout.write(`This computer is no longer the bench ${bench.name}. Its token is gone from here.\n`);
  const names = [...new Set(entries.map(({ by }) => by.name))];
  if (names.length > 0)
    context.stderr.say(
      `${plural(entries.length, 'thing waits', 'things wait')} here still, recorded by ${names.join(', ')}: nothing is lost. Each signs in and sends it (refettle sign-in, refettle sync), or this computer joins the bench again.`,
    );
  context.stderr.say('Where this computer goes away, a lead also revokes the bench’s token, on the page Shared benches.');
  return Promise.resolve(EXIT.good);
}
