import { joinedBench } from '../bench/joined-bench.js';
import type { Context } from '../context.js';
import { ApiProblemError, NotSignedInError, ServerError } from '../errors.js';
import { wordsOf } from '../report-error.js';
import { readSession } from '../session.js';
import { keepEntry, putAway, waitingEntries, type OutboxEntry } from './outbox.js';

export type Delivery =
  /** The server has it; `answer` is what it said. */
  | { state: 'sent'; entry: OutboxEntry; answer: unknown }
  /** It waits on this bench for something that passes: the network, a sign-in. */
  | { state: 'waits'; entry: OutboxEntry; why: string; onlyThis?: true }
  /** The server refuses it; `error` says why and who must act. */
  | { state: 'refused'; entry: OutboxEntry; why: string; error?: ApiProblemError };

/** Refusals that pass by themselves or with a sign-in: nothing is wrong with the entry. */
const PASSING_STATUS = new Set([408, 425, 429]);

/**
 * Sends what waits, in order. Where the server is away or nobody is signed in, the rest waits too.
 * What was refused before is tried again only with `again`.
 */
export async function sendWaiting(context: Context, { again = false } = {}): Promise<Delivery[]> {
  const deliveries: Delivery[] = [];
  let standstill: string | undefined;
  for (const entry of waitingEntries(context.home).entries) {
    const delivery = standstill === undefined ? await send(context, entry, again) : ({ state: 'waits', entry, why: standstill } as const);
    deliveries.push(delivery);
    if (delivery.state === 'waits' && delivery.onlyThis !== true && delivery.why !== whyNotNow(context, entry)) standstill = delivery.why;
  }
  return deliveries;
}

/** Writes an entry down, then sends it and whatever waited before it. */
export async function keepAndSend(context: Context, entry: OutboxEntry): Promise<Delivery> {
  keepEntry(context.home, entry);
  const deliveries = await sendWaiting(context);
  return (
    deliveries.find((delivery) => delivery.entry.id === entry.id) ?? { state: 'waits', entry, why: 'it is being sent by another terminal' }
  );
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

async function send(context: Context, entry: OutboxEntry, again: boolean): Promise<Delivery> {
  if (entry.refused && !again) return { state: 'refused', entry, why: `${entry.refused.reason} ${entry.refused.remedy}` };
  const why = whyNotNow(context, entry);
  if (why !== undefined) return { state: 'waits', entry, why };
  try {
    const api = await context.api(entry.by);
    const { route, body, id } = entry;
    const answer: unknown = await api.call(route, {
      ...('params' in entry ? { params: entry.params } : {}),
      body,
      idempotencyKey: id,
    });
    putAway(context.home, id, 'sent');
    return { state: 'sent', entry, answer };
  } catch (error) {
    if (!(error instanceof ServerError)) throw error;
    if (error instanceof ApiProblemError && error.kind === 'sign-on')
      return {
        state: 'waits',
        entry,
        why: `${entry.by.name} recorded it and has never signed on at this bench. ${error.remedy}, then: refettle sync`,
        onlyThis: true,
      };
    if (error instanceof ApiProblemError && error.status < 500 && !PASSING_STATUS.has(error.status)) {
      const refused = { at: context.now().toISOString(), status: error.status, reason: error.message, remedy: error.remedy };
      keepEntry(context.home, { ...entry, refused });
      return { state: 'refused', entry, why: wordsOf(error), error };
    }
    return {
      state: 'waits',
      entry,
      why: error instanceof NotSignedInError ? `${error.message} ${error.remedy}, then: refettle sync` : wordsOf(error).replace('\n', ' '),
    };
  }
}
