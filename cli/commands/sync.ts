import type { Context } from '../context.js';
import { UsageError } from '../errors.js';
import { EXIT, firstExitCode } from '../exit-codes.js';
import { sendWaiting } from '../journal/deliver.js';
import { putAway, waitingEntries, type OutboxEntry } from '../journal/outbox.js';
import { closeEnded } from '../journal/open-runs.js';
import { printJson } from '../render/json.js';
import { dayText, plural, timeText } from '../render/words.js';

export interface SyncOptions {
  status?: boolean;
  drop?: string;
  json?: boolean;
}

/** Sends what waits on this bench, in order, or says what waits and who must act. */
export async function runSync({ status, drop, json }: SyncOptions, context: Context): Promise<number> {
  closeEnded(context);
  if (drop !== undefined) return giveUp(drop, context);
  const { entries, unreadable } = waitingEntries(context.home);
  for (const file of unreadable)
    context.stderr.say(`${file}: this can't be read; it is left where it is. A newer version of Refettle may have written it.`);
  const deliveries = status === true ? [] : await sendWaiting(context, { again: true });
  const left =
    status === true
      ? entries.map(describe)
      : deliveries
          .filter(({ state }) => state !== 'sent')
          .map((one) => ({ ...describe(one.entry), state: one.state, why: 'why' in one ? one.why : '' }));
  const sent = deliveries.filter(({ state }) => state === 'sent').map(({ entry }) => ({ id: entry.id, what: entry.what }));

  if (json === true) printJson(context, { sent, left });
  else {
    for (const { what } of sent) context.stdout.write(`sent: ${what}\n`);
    for (const { id, what, madeAt, state, why } of left)
      context.stdout.write(
        `${state}: ${what}, ${dayText(madeAt)} ${timeText(madeAt)}  (${id})\n${why
          .split('\n')
          .map((line) => `  ${line}\n`)
          .join('')}`,
      );
    if (sent.length === 0 && left.length === 0) context.stdout.write('Nothing waits on this bench.\n');
    else if (left.length > 0)
      context.stderr.say(`${plural(left.length, 'thing waits', 'things wait')} on this bench; nothing of it is lost.`);
  }
  return firstExitCode([left.length > 0 ? EXIT.server : EXIT.good, unreadable.length > 0 ? EXIT.badInput : EXIT.good]);
}

const describe = (entry: OutboxEntry) => ({
  id: entry.id,
  what: entry.what,
  madeAt: entry.madeAt,
  server: entry.server,
  by: entry.by.name,
  state: entry.refused ? ('refused' as const) : ('waits' as const),
  why: entry.refused
    ? `${entry.refused.reason}\n${entry.refused.remedy}`
    : `recorded by ${entry.by.name}, for ${entry.server}: refettle sync sends it`,
});

function giveUp(id: string, context: Context): number {
  const entry = waitingEntries(context.home).entries.find((one) => one.id === id);
  if (!entry) throw new UsageError(`Nothing waits here with the id '${id}': refettle sync --status lists what does`);
  if (!entry.refused) throw new UsageError(`The ${entry.what} was not refused: it is only waiting. refettle sync sends it`);
  putAway(context.home, id, 'dropped');
  context.stdout.write(`Given up: ${entry.what}. It stays on the disk, in ${context.home.path('journal', 'dropped')}.\n`);
  return EXIT.good;
}
