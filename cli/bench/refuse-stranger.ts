import type { PersonRef } from '../../shared/history/events.js';
import type { Context } from '../context.js';
import { UsageError } from '../errors.js';
import { joinedBench } from './joined-bench.js';

/**
 * On a shared bench anybody who signs on may go on with a run: it is handed over. On a bench of one's own the server only knows who is
 * signed in, and would have to take one person's word for another's work.
 */
export function refuseStranger({ home, server }: Context, person: PersonRef, whose: PersonRef): void {
  if (person.id === whose.id || joinedBench(home, server)) return;
  throw new UsageError(
    `That run is ${whose.name}'s, and ${person.name} is signed in. ${whose.name} goes on with it (refettle sign-in), or the bench becomes a shared one, where runs are handed over (refettle bench join)`,
  );
}
