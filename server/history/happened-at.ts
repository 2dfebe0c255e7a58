import { InvalidError } from '../errors.js';

/**
 * A clock may run ahead a little (common practice, no published source). By more than that it is wrong, and what it stamps would pass
 * for newer than a repair that comes after it.
 */
const AHEAD_AT_MOST_MINUTES = 10;
const EARLIEST = Date.parse('2000-01-01T00:00:00Z');

/** When something happened, by the clock of whoever recorded it. Refuses what no clock that is right can say. */
export function happenedAt(at: string, now: Date, pointer: string): Date {
  const time = new Date(at);
  if (!(time.getTime() >= EARLIEST)) throw new InvalidError([{ pointer, reason: 'lies before the year 2000: set the clock of the bench' }]);
  refuseFuture(at, now, pointer);
  return time;
}

/** For a file's own word on when it was recorded: a date ahead would keep it newer than every repair to come. */
export function refuseFuture(at: string, now: Date, pointer: string): void {
  if (Date.parse(at) <= now.getTime() + AHEAD_AT_MOST_MINUTES * 60_000) return;
  throw new InvalidError([
    {
      pointer,
      reason: `lies more than ${String(AHEAD_AT_MOST_MINUTES)} minutes ahead of the server, where it is ${now.toISOString()}: set the clock of the bench`,
    },
  ]);
}
