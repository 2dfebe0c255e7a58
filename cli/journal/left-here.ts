import type { Context } from '../context.js';
import { waitingEntries, type OutboxEntry } from './outbox.js';
import { mayBeGivenUp, triesOf } from './tries.js';

/** Something that waits, for people and programs. */
export interface Left {
  id: string;
  what: string;
  madeAt: string;
  server: string;
  by: string;
  state: 'waits' | 'refused';
  /** How often it was tried, last when, and when again by itself. */
  tries: number;
  lastTryAt?: string;
  nextTryAt?: string;
  /** A person may decide that it is given up: refettle sync --drop. */
  mayBeGivenUp: boolean;
  why: string;
}

export function leftHere({ home }: Pick<Context, 'home'>, entry: OutboxEntry): Left {
  const tries = triesOf(home, entry.id);
  return {
    id: entry.id,
    what: entry.what,
    madeAt: entry.madeAt,
    server: entry.server,
    by: entry.by.name,
    state: entry.refused ? 'refused' : 'waits',
    tries: tries?.count ?? 0,
    ...(tries ? { lastTryAt: tries.lastAt } : {}),
    ...(tries && !entry.refused ? { nextTryAt: tries.nextAt } : {}),
    mayBeGivenUp: entry.refused !== undefined || mayBeGivenUp(tries),
    why: entry.refused
      ? `${entry.refused.reason}\n${entry.refused.remedy}`
      : (tries?.why ?? `recorded by ${entry.by.name}, for ${entry.server}: refettle sync sends it`),
  };
}

/** What of a unit is on this bench only: not sent yet, or refused. */
export const leftOfUnit = (context: Pick<Context, 'home' | 'server'>, number: number): Left[] =>
  waitingEntries(context.home)
    .entries.filter((entry) => entry.server === context.server && 'params' in entry && entry.params.number === number)
    .map((entry) => leftHere(context, entry));
