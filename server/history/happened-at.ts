import { InvalidError } from '../errors.js';

/** A bench's clock may run ahead; by more than a day it is wrong, and would shut the unit's history to what comes after. */
const AHEAD_AT_MOST_MS = 86_400_000;
const EARLIEST = Date.parse('2000-01-01T00:00:00Z');

/** When something happened, by the clock of whoever recorded it. Refuses what no clock that is right can say. */
export function happenedAt(at: string, now: Date, pointer: string): Date {
  const time = new Date(at);
  if (!(time.getTime() >= EARLIEST))
    throw new InvalidError([{ pointer, reason: 'lies before the year 2000: is the bench’s clock right?' }]);
  refuseFuture(at, now, pointer);
  return time;
}

/** For a file's own word on when it was recorded: a date ahead would keep it newer than every repair to come. */
export function refuseFuture(at: string, now: Date, pointer: string): void {
  if (Date.parse(at) <= now.getTime() + AHEAD_AT_MOST_MS) return;
  throw new InvalidError([{ pointer, reason: 'lies in the future: is the bench’s clock right?' }]);
}
