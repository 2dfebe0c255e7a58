import { rmSync } from 'node:fs';
import { z } from 'zod';
import { readIfThere, writeWhole, type Home } from '../home.js';
import { parseJson } from '../session.js';

const triesSchema = z.strictObject({
  count: z.number().int().positive(),
  lastAt: z.iso.datetime(),
  /** Not before then, unless a person asks for it. */
  nextAt: z.iso.datetime(),
  /** The server asked for it: not even then. */
  serverAsks: z.boolean(),
  why: z.string(),
  /** How often the server was there, and this one did not get through all the same. */
  stuck: z.number().int().nonnegative().default(0),
  /** Its times lie ahead of the server's. */
  ahead: z.boolean().default(false),
});
/** How often one message was tried, and when it is tried again. Beside the message, which may be long and never changes. */
export type Tries = z.infer<typeof triesSchema>;

/** Twice as long each time, from two seconds to five minutes (common practice, no published source). */
const FIRST_MS = 2000;
export const LONGEST_BACK_OFF_MS = 300_000;

/**
 * How long to wait after so many tries: exponential with a cap, and half of it by chance, so that twenty benches don't come back
 * at the same moment when the server does.
 *
 * @example backOffMs(3, () => 1) // 8000
 */
export function backOffMs(count: number, random: () => number): number {
  const most = Math.min(LONGEST_BACK_OFF_MS, FIRST_MS * 2 ** (count - 1));
  return Math.round(most / 2 + (most / 2) * random());
}

const fileOf = (home: Home, id: string): string => home.path('journal', 'tries', `${id}.json`);

export function triesOf(home: Home, id: string): Tries | undefined {
  return triesSchema.safeParse(parseJson(readIfThere(fileOf(home, id)) ?? '')).data;
}

/** A try that did not get through. */
export interface Failure {
  now: Date;
  why: string;
  random: () => number;
  /** Longer than the back-off, where the server or a clock asks for it. */
  waitMs?: number;
  serverAsks?: boolean;
  /** It is this message that the server can't do with, as far as one can tell. */
  stuck?: boolean;
  ahead?: boolean;
}

/** One more try that did not get through. */
export function countTry(home: Home, id: string, failure: Failure): Tries {
  const { now, why, random, waitMs = 0, serverAsks = false, stuck = false, ahead = false } = failure;
  const before = triesOf(home, id);
  const count = (before?.count ?? 0) + 1;
  const nextAt = new Date(now.getTime() + Math.max(backOffMs(count, random), waitMs)).toISOString();
  const tries = { count, lastAt: now.toISOString(), nextAt, serverAsks, why, stuck: (before?.stuck ?? 0) + (stuck ? 1 : 0), ahead };
  writeWhole(fileOf(home, id), `${JSON.stringify(tries)}\n`);
  return tries;
}

/** Whether it is time for the next try. A try that lies ahead was made under a clock that has been set back since: nothing it says holds. */
export const isDue = ({ lastAt, nextAt }: Tries, now: Date): boolean =>
  Date.parse(nextAt) <= now.getTime() || Date.parse(lastAt) > now.getTime();

/** So often it may be chance, a server that was just being started, or a proxy before it. */
const STUCK_FROM = 3;

/** Whether a person may give it up, though nobody refused it: it has failed by itself too often, or its own time may never come. */
export const mayBeGivenUp = (tries: Tries | undefined): boolean => tries !== undefined && (tries.ahead || tries.stuck >= STUCK_FROM);

export const forgetTries = (home: Home, id: string): void => rmSync(fileOf(home, id), { force: true });
