import type { Context } from '../context.js';
import { StoppedError, UsageError } from '../errors.js';
import { EXIT, firstExitCode } from '../exit-codes.js';
import { sendWaiting, type Delivery } from '../journal/deliver.js';
import { leftHere, type Left } from '../journal/left-here.js';
import { closeEnded, openRuns } from '../journal/open-runs.js';
import { putAway, waitingEntries } from '../journal/outbox.js';
import { backOffMs, LONGEST_BACK_OFF_MS } from '../journal/tries.js';
import { printJson } from '../render/json.js';
import { dayText, plural, timeText, times } from '../render/words.js';

export interface SyncOptions {
  status?: boolean;
  watch?: boolean;
  drop?: string;
  json?: boolean;
}

/** Sends what waits on this bench, in order, or says what waits, why, and who must act. */
export async function runSync({ status, watch, drop, json }: SyncOptions, context: Context): Promise<number> {
  if (watch === true && (status === true || drop !== undefined))
    throw new UsageError('--watch sends until nothing waits: leave --status and --drop out');
  await closeEnded(context);
  if (drop !== undefined) return giveUp(drop, context);
  const { entries, unreadable } = waitingEntries(context.home);
  for (const file of unreadable)
    context.stderr.say(`${file}: this can't be read; it is left where it is. A newer version of Refettle may have written it.`);
  const deliveries = status === true ? [] : watch === true ? await keepSending(context) : await sendWaiting(context, { again: true });
  const left =
    status === true
      ? entries.map((entry) => leftHere(context, entry))
      : deliveries
          .filter(({ state }) => state !== 'sent')
          .map((one): Left => ({
            ...leftHere(context, one.entry),
            state: one.state === 'refused' ? 'refused' : 'waits',
            why: 'why' in one ? one.why : '',
          }));
  const sent = deliveries.filter(({ state }) => state === 'sent').map(({ entry }) => ({ id: entry.id, what: entry.what }));

  if (json === true) printJson(context, { sent, left });
  else say(context, sent, left, status === true);
  return firstExitCode([left.length > 0 ? EXIT.server : EXIT.good, unreadable.length > 0 ? EXIT.badInput : EXIT.good]);
}

function say(context: Context, sent: readonly { what: string }[], left: readonly Left[], status: boolean): void {
  const { stdout, stderr } = context;
  for (const { what } of sent) stdout.write(`sent: ${what}\n`);
  for (const one of left) {
    stdout.write(`${one.state}: ${one.what}, ${dayText(one.madeAt)} ${timeText(one.madeAt)}  (${one.id})\n`);
    for (const line of one.why.split('\n')) stdout.write(`  ${line}\n`);
    if (one.tries > 0 && one.lastTryAt !== undefined)
      stdout.write(
        `  tried ${times(one.tries)}, last at ${timeText(one.lastTryAt)}${one.nextTryAt === undefined ? '' : `; again from ${timeText(one.nextTryAt)} on`}\n`,
      );
    if (one.state === 'waits' && one.mayBeGivenUp)
      stdout.write(`  The server is there, and this does not get through. To give it up: refettle sync --drop ${one.id}\n`);
  }
  if (sent.length === 0 && left.length === 0) stdout.write('Nothing waits on this bench.\n');
  else if (left.length > 0) stderr.say(`${plural(left.length, 'thing waits', 'things wait')} on this bench; nothing of it is lost.`);
  const open = status ? openRuns(context).runs.length : 0;
  if (open > 0) stderr.say(`${plural(open, 'run is', 'runs are')} open and not sent before they are closed: refettle runs`);
}

const LEAST_WAIT_MS = 100;

/** Sends until nothing waits but what somebody must decide on; what does not get through is tried again after a while, longer each time. */
async function keepSending(context: Context): Promise<Delivery[]> {
  const over = new Map<string, Delivery>();
  for (let round = 1; ; round += 1) {
    const deliveries = await sendWaiting(context, { again: round === 1, due: round > 1 });
    for (const delivery of deliveries) over.set(delivery.entry.id, delivery);
    const waiting = deliveries.filter((one) => one.state === 'waits');
    if (waiting.length === 0) return [...over.values()];
    const now = context.now().getTime();
    const due = waiting.flatMap((one) => (one.nextAt === undefined ? [] : [Date.parse(one.nextAt) - now]));
    // Not longer than the longest back-off, whatever is waited for: clocks are set, and a timer takes no month.
    const untilDueMs = due.length > 0 ? Math.min(...due) : backOffMs(round, Math.random);
    const waitMs = Math.min(LONGEST_BACK_OFF_MS, Math.max(LEAST_WAIT_MS, untilDueMs));
    const [first] = waiting;
    if (first)
      context.stderr.say(`${plural(waiting.length, 'thing waits', 'things wait')}; again in ${Math.ceil(waitMs / 1000)} s: ${first.why}`);
    await sleepUnlessStopped(context, waitMs);
  }
}

async function sleepUnlessStopped(context: Context, milliseconds: number): Promise<void> {
  const { interruption } = context;
  const stopped = new Promise<void>((stop) => interruption.signal.addEventListener('abort', () => stop(), { once: true }));
  await interruption.hold(() => Promise.race([context.sleep(milliseconds), stopped]));
  if (interruption.interrupted) throw new StoppedError('Stopped. What waits stays on this bench.');
}

function giveUp(id: string, context: Context): number {
  const entry = waitingEntries(context.home).entries.find((one) => one.id === id);
  if (!entry) throw new UsageError(`Nothing waits here with the id '${id}': refettle sync --status lists what does`);
  if (!leftHere(context, entry).mayBeGivenUp)
    throw new UsageError(`The ${entry.what} was not refused: it is only waiting. refettle sync sends it`);
  putAway(context.home, id, 'dropped');
  context.stdout.write(`Given up: ${entry.what}. It stays on the disk, in ${context.home.path('journal', 'dropped')}.\n`);
  return EXIT.good;
}
