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
});
/** How often one message was tried, and when it is tried again. Beside the message, which may be long and never changes. */
export type Tries = z.infer<typeof triesSchema>;

/** Twice as long each time, from two seconds to five minutes (common practice, no published source). */
const FIRST_MS = 2000;
const MOST_MS = 300_000;

/**
 * How long to wait after so many tries: exponential with a cap, and half of it by chance, so that twenty benches don't come back
 * at the same moment when the server does.
 *
 * @example backOffMs(3, () => 1) // 8000
 */
export function backOffMs(count: number, random: () => number): number {
  const most = Math.min(MOST_MS, FIRST_MS * 2 ** (count - 1));
  return Math.round(most / 2 + (most / 2) * random());
}

const fileOf = (home: Home, id: string): string => home.path('journal', 'tries', `${id}.json`);

export function triesOf(home: Home, id: string): Tries | undefined {
  return triesSchema.safeParse(parseJson(readIfThere(fileOf(home, id)) ?? '')).data;
}

/** One more try that did not get through. `waitMs`: longer than the back-off, where the server or a clock asks for it. */
export function countTry(
  home: Home,
  id: string,
  {
    now,
    why,
    random,
    waitMs,
    serverAsks = false,
  }: { now: Date; why: string; random: () => number; waitMs?: number | undefined; serverAsks?: boolean },
): Tries {
  const count = (triesOf(home, id)?.count ?? 0) + 1;
  const nextAt = new Date(now.getTime() + Math.max(backOffMs(count, random), waitMs ?? 0)).toISOString();
  const tries = { count, lastAt: now.toISOString(), nextAt, serverAsks, why };
  writeWhole(fileOf(home, id), `${JSON.stringify(tries)}\n`);
  return tries;
}

export const forgetTries = (home: Home, id: string): void => rmSync(fileOf(home, id), { force: true });
