import { joinedBench } from '../bench/joined-bench.js';
import type { Context } from '../context.js';
import { ApiProblemError, NotSignedInError, ServerError, ServerUnreachableError } from '../errors.js';
import { wordsOf } from '../report-error.js';
import { readSession } from '../session.js';
import { takeLock } from './lock.js';
import { closeEnded } from './open-runs.js';
import { keepEntry, putAway, waitingEntries, type OutboxEntry } from './outbox.js';
import { countTry, forgetTries, isDue, triesOf, type Failure } from './tries.js';

export type Delivery =
  /** The server has it; `answer` is what it said. */
  | { state: 'sent'; entry: OutboxEntry; answer: unknown }
  /** It waits on this bench for something that passes: the network, a sign-in, a clock. `onlyThis`: other units may go. */
  | { state: 'waits'; entry: OutboxEntry; why: string; onlyThis?: boolean; nextAt?: string }
  /** The server refuses it; `error` says why and who must act. */
  | { state: 'refused'; entry: OutboxEntry; why: string; error?: ApiProblemError };

/** Refusals that pass by themselves or with a sign-in: nothing is wrong with the entry, and the others would fare no better. */
const PASSING_STATUS = new Set([408, 425, 429, 503]);
/** The server takes nothing that lies further ahead of its own clock than this. */
const AHEAD_AT_MOST_MS = 600_000;
const BY_ANOTHER = 'it is being sent by another terminal';

export interface Sending {
  /** What the server refused before is tried again. */
  again?: boolean;
  /** Only what is due: what did not get through waits longer each time. `besides`: and all that waits for this one's unit. */
  due?: boolean;
  besides?: OutboxEntry;
  /** From 0 to 1. */
  random?: () => number;
}

/**
 * Sends what waits, in order, one terminal of a bench at a time. Where one thing of a unit waits, what came after it on that unit does.
 * Where the server is away or nobody is signed in, all the rest waits; so units of which something did not get through before go last.
 */
export async function sendWaiting(context: Context, sending: Sending = {}): Promise<Delivery[]> {
  const { entries } = waitingEntries(context.home);
  if (entries.length === 0) return [];
  const lock = await takeLock(context, SENDER_LOCK, { what: 'sending what waits' });
  if ('owner' in lock) return entries.map((entry) => ({ state: 'waits', entry, why: BY_ANOTHER, onlyThis: true }));
  try {
    // Read again: another terminal may have sent some of it meanwhile.
    const waiting = waitingEntries(context.home).entries;
    const deliveries = new Map<OutboxEntry, Delivery>();
    const heldUp = new Map<string, string>();
    let standstill: string | undefined;
    for (const entry of neverTriedFirst(context, waiting)) {
      const unit = unitOf(entry);
      const before = heldUp.get(unit);
      const behind = standstill ?? (before === undefined ? undefined : `what was recorded before it on this unit goes first. ${before}`);
      const delivery: Delivery = behind === undefined ? await send(context, entry, sending) : { state: 'waits', entry, why: behind };
      deliveries.set(entry, delivery);
      if (delivery.state !== 'waits' || behind !== undefined) continue;
      heldUp.set(unit, delivery.why);
      if (delivery.onlyThis !== true) standstill = delivery.why;
    }
    return waiting.flatMap((entry) => deliveries.get(entry) ?? []);
  } finally {
    lock.release();
  }
}

/** Entries of one unit at one server keep their order among themselves; what is taken in has no number yet and is on its own. */
const unitOf = (entry: OutboxEntry): string => ('params' in entry ? `${entry.server} ${String(entry.params.number)}` : entry.id);

function neverTriedFirst({ home }: Context, entries: readonly OutboxEntry[]): OutboxEntry[] {
  const tried = new Set(entries.filter(({ id }) => triesOf(home, id)).map(unitOf));
  const isTried = (entry: OutboxEntry): boolean => tried.has(unitOf(entry));
  return [...entries.filter((entry) => !isTried(entry)), ...entries.filter(isTried)];
}

export const SENDER_LOCK = 'sender';

/** Writes an entry down behind the runs that had ended before it, then sends it. */
export async function keepAndSend(context: Context, entry: OutboxEntry): Promise<Delivery> {
  await closeEnded(context);
  keepEntry(context.home, entry);
  return sendNow(context, entry);
}

/** Sends an entry that was just written down and whatever waits before it; of other units what is due. */
export async function sendNow(context: Context, entry: OutboxEntry): Promise<Delivery> {
  const deliveries = await sendWaiting(context, { due: true, besides: entry });
  return deliveries.find((delivery) => delivery.entry.id === entry.id) ?? { state: 'waits', entry, why: BY_ANOTHER };
}

/** What keeps this one from being sent now, though another one may go. */
function whyNotNow({ home, server }: Context, entry: OutboxEntry): string | undefined {
  if (entry.server !== server) return `it is for the server at ${entry.server}: set REFETTLE_SERVER to it`;
  // A shared bench sends for whoever has signed on at it: nobody needs to be there.
  if (joinedBench(home, server)) return undefined;
  const user = readSession(home, server)?.user;
  // The server takes down who signed in as who did it: nobody sends another's work as their own.
  if (user && user.id !== entry.by.id)
    return `${entry.by.name} recorded it and must be the one to send it: sign in as ${entry.by.name}, then refettle sync`;
  return undefined;
}

async function send(
  context: Context,
  entry: OutboxEntry,
  { again = false, due = false, besides, random = Math.random }: Sending,
): Promise<Delivery> {
  const { home } = context;
  if (entry.refused && !again) return { state: 'refused', entry, why: `${entry.refused.reason} ${entry.refused.remedy}` };
  const why = whyNotNow(context, entry);
  if (why !== undefined) return { state: 'waits', entry, why, onlyThis: true };
  const tries = triesOf(home, entry.id);
  const patient = due && (besides === undefined || unitOf(entry) !== unitOf(besides));
  if (tries && (patient || tries.serverAsks) && !isDue(tries, context.now()))
    return { state: 'waits', entry, why: tries.why, nextAt: tries.nextAt, onlyThis: true };
  const waits = (reason: string, { onlyThis = false, ...about }: NotThrough = {}): Delivery => {
    const { nextAt } = countTry(home, entry.id, { now: context.now(), why: reason, random, ...about });
    return { state: 'waits', entry, why: reason, nextAt, ...(onlyThis ? { onlyThis } : {}) };
  };
  try {
    const api = await context.api(entry.by);
    const { route, body, id } = entry;
    const answer: unknown = await api.call(route, {
      ...('params' in entry ? { params: entry.params } : {}),
      body,
      idempotencyKey: id,
    });
    putAway(home, id, 'sent');
    forgetTries(home, id);
    return { state: 'sent', entry, answer };
  } catch (error) {
    if (!(error instanceof ServerError)) throw error;
    if (error instanceof NotSignedInError) return waits(`${error.message} ${error.remedy}, then: refettle sync`);
    const words = wordsOf(error).replace('\n', ' ');
    // Nobody answers, or not within a time in which others might have been: whether it is the server or this one is not known.
    if (error instanceof ServerUnreachableError) return waits(words, { stuck: error.timedOut });
    if (!(error instanceof ApiProblemError)) return waits(words, { onlyThis: true, stuck: true });
    if (error.kind === 'sign-on')
      return waits(`${entry.by.name} recorded it and has never signed on at this bench. ${error.remedy}, then: refettle sync`, {
        onlyThis: true,
      });
    const aheadMs = error.status === 422 ? aheadOf(entry, error.serverTime) : 0;
    if (aheadMs > 0)
      return waits(
        `It was recorded by a clock that runs ahead: its times lie up to ${String(Math.ceil((aheadMs + AHEAD_AT_MOST_MS) / 60_000))} min ahead of the server. ` +
          'Set the clock of this bench. It is kept as it is, and goes when the server’s clock has come that far: refettle sync --watch',
        { waitMs: aheadMs, onlyThis: true, ahead: true },
      );
    const { retryAfterSeconds } = error;
    const asks = retryAfterSeconds === undefined ? {} : { waitMs: retryAfterSeconds * 1000, serverAsks: true };
    if (PASSING_STATUS.has(error.status)) return waits(words, asks);
    if (error.status >= 500) return waits(words, { ...asks, onlyThis: true, stuck: true });
    const refused = { at: context.now().toISOString(), status: error.status, reason: error.message, remedy: error.remedy };
    keepEntry(home, { ...entry, refused });
    return { state: 'refused', entry, why: wordsOf(error), error };
  }
}

/** What one try came to that did not get through. */
interface NotThrough extends Omit<Failure, 'now' | 'why' | 'random'> {
  onlyThis?: boolean;
}

/** By how many milliseconds the latest time of a message lies further ahead than the server takes; 0 or below where it does not. */
function aheadOf({ body }: OutboxEntry, serverTime: Date | undefined): number {
  if (serverTime === undefined) return 0;
  const latest = 'endedAt' in body ? body.endedAt : 'at' in body ? body.at : undefined;
  return latest === undefined ? 0 : Date.parse(latest) - serverTime.getTime() - AHEAD_AT_MOST_MS;
}
