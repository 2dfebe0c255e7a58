import { rmSync } from 'node:fs';
import { z } from 'zod';
import { personRefSchema, type PersonRef } from '../../shared/history/events.js';
import type { Context } from '../context.js';
import { UsageError } from '../errors.js';
import { readIfThere, writeWhole, type Home } from '../home.js';
import { parseJson } from '../session.js';

const FILE = 'sign-on.json';
const MINUTE_MS = 60_000;

/**
 * How long a sign-on holds without a command: a row of measurements with gloves on should not ask for a PIN each time, and who has gone
 * to lunch should not be taken for who sits down next (common practice, no published source). Runs ask at their start all the same.
 */
const USUAL_MINUTES = 10;
const MOST_MINUTES = 480;
export const SIGN_ON_MINUTES = 'REFETTLE_SIGN_ON_MINUTES';

const keptSchema = z.strictObject({ bench: z.string(), person: personRefSchema, usedAt: z.iso.datetime() });

/** Who has signed on in this very command: holds to its end, however long it takes. */
const inThisCommand = new WeakMap<Context, PersonRef>();

export function signOnMinutes({ env }: Pick<Context, 'env'>): number {
  const text = env[SIGN_ON_MINUTES];
  if (text === undefined || text === '') return USUAL_MINUTES;
  if (!/^\d{1,3}$/.test(text) || Number(text) > MOST_MINUTES)
    throw new UsageError(`${SIGN_ON_MINUTES} is no number of minutes from 0 to ${MOST_MINUTES}: '${text}'. 0 asks at each command`);
  return Number(text);
}

/** Until when the sign-on on this bench holds, and whose it is; undefined where nobody's does. */
export function keptSignOn(context: Context, benchId: string): { person: PersonRef; until: Date } | undefined {
  const kept = keptSchema.safeParse(parseJson(readIfThere(context.home.path(FILE)) ?? ''));
  if (!kept.success || kept.data.bench !== benchId) return undefined;
  const usedAt = Date.parse(kept.data.usedAt);
  const until = new Date(usedAt + signOnMinutes(context) * MINUTE_MS);
  const now = context.now();
  // A clock that was set back must not make a sign-on last.
  return now < until && now.getTime() >= usedAt ? { person: kept.data.person, until } : undefined;
}

/** Who stands here: by this command's own sign-on, or by one that still holds. */
export const standingHere = (context: Context, benchId: string): PersonRef | undefined =>
  inThisCommand.get(context) ?? keptSignOn(context, benchId)?.person;

/** Somebody has signed on, or goes on working. */
export function keepSignOn(context: Context, benchId: string, person: PersonRef): void {
  inThisCommand.set(context, person);
  if (signOnMinutes(context) === 0) return;
  writeWhole(context.home.path(FILE), `${JSON.stringify({ bench: benchId, person, usedAt: context.now().toISOString() })}\n`);
}

export function forgetSignOn(home: Home): void {
  rmSync(home.path(FILE), { force: true });
}
