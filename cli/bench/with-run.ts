import type { UnitEvent } from '../../shared/history/events.js';
import { isMend } from '../../shared/readiness/facts.js';

/**
 * The history of a unit with a run of this bench in it that the server does not know yet. Where the machine was mended or came back
 * meanwhile, what the run had done before stands before that, as the server will place it: it says nothing about the mended machine.
 */
export function withRun(history: readonly UnitEvent[], run: readonly UnitEvent[]): UnitEvent[] {
  const events = [...history];
  let latest = 0;
  for (const event of run) {
    latest = Math.max(latest, Date.parse(event.at));
    const after = events.findIndex((one) => !run.includes(one) && (isMend(one) || one.kind === 'returned') && Date.parse(one.at) > latest);
    events.splice(after < 0 ? events.length : after, 0, event);
  }
  return events;
}
