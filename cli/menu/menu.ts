import { keptSignOn } from '../bench/kept-sign-on.js';
import { joinedBench } from '../bench/joined-bench.js';
import type { Context } from '../context.js';
import { StoppedError, UsageError } from '../errors.js';
import { EXIT } from '../exit-codes.js';
import { openRuns } from '../journal/open-runs.js';
import { waitingEntries } from '../journal/outbox.js';
import { reportError } from '../report-error.js';
import { readSession } from '../session.js';
import { doAndWait } from './do-command.js';
import { chosenUnit, openRunsHere, signing, unitsWaiting, whatWaits } from './places.js';

interface Item {
  name: string;
  go: (context: Context) => Promise<void>;
}

/**
 * The menu of the bench: what a day there needs, each with the command that does the same. Escape goes back, and at last out;
 * Ctrl-C in a command comes back here, Ctrl-C here leaves.
 */
export async function runMenu(context: Context): Promise<number> {
  if (context.env['TERM'] === 'dumb')
    throw new UsageError('The menu moves the cursor, and this terminal (TERM is dumb) can’t: refettle --help lists the commands');
  const { ink } = await context.stderr.style();
  context.stderr.say(`${ink.bold('Refettle')}  ${whoWorksHere(context)}`);
  while (!context.interruption.interrupted) {
    const items = itemsNow(context);
    const chosen = await context.prompt.pick({
      message: 'What now',
      choices: items.map(({ name }) => ({ value: name, name })),
      instead: 'give a command: refettle --help lists them',
    });
    const item = items.find(({ name }) => name === chosen);
    if (!item) return EXIT.good;
    try {
      await item.go(context);
    } catch (error) {
      if (error instanceof StoppedError) throw error;
      reportError(error, context);
    }
  }
  return EXIT.stopped;
}

function itemsNow(context: Context): Item[] {
  const open = openRuns(context).runs.length;
  const waiting = waitingEntries(context.home).entries.length;
  const sign = signing(context);
  const count = (number: number): string => (number === 0 ? '' : ` (${number})`);
  return [
    { name: 'Units waiting for me', go: unitsWaiting },
    { name: 'Start a run', go: (here) => chosenUnit('run', here) },
    { name: `Go on with a run${count(open)}`, go: openRunsHere },
    { name: 'Capture lamps', go: (here) => chosenUnit('capture', here) },
    { name: 'Measure', go: (here) => chosenUnit('measure', here) },
    { name: 'Take in a unit', go: (here) => doAndWait(['unit', 'new'], here) },
    { name: 'Readiness tag', go: (here) => chosenUnit('tag', here) },
    { name: `What waits to be sent${count(waiting)}`, go: whatWaits },
    { name: sign.name, go: (here) => doAndWait(sign.args, here) },
  ];
}

function whoWorksHere(context: Context): string {
  const joined = joinedBench(context.home, context.server);
  if (joined)
    return `bench ${joined.bench.name}, ${keptSignOn(context, joined.bench.id)?.person.name ?? 'nobody signed on'}, at ${context.server}`;
  const user = readSession(context.home, context.server)?.user;
  return user ? `${user.name}, ${user.role}, at ${context.server}` : `nobody is signed in, at ${context.server}`;
}
