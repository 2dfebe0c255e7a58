import type { Home } from '../home.js';
import { awayEntry, waitingEntries, type OutboxEntry } from './outbox.js';

export type ClosedRun = { entry: Extract<OutboxEntry, { route: 'recordRun' }>; where: 'waiting' | 'sent' | 'dropped' };

/**
 * The run that is meant, among those of this bench that are closed: by its id, or by its unit's number the newest that waits to be sent.
 * Undefined where this bench knows none.
 */
export function closedRunNamed(home: Home, named: string): ClosedRun | undefined {
  const unit = /^\d{1,9}$/.test(named) ? Number(named) : undefined;
  const id = named.toLowerCase();
  const waiting = waitingEntries(home).entries.findLast(
    (entry) => entry.route === 'recordRun' && (unit === undefined ? entry.id === id : entry.params.number === unit),
  );
  if (waiting?.route === 'recordRun') return { entry: waiting, where: 'waiting' };
  for (const where of ['sent', 'dropped'] as const) {
    const entry = unit === undefined ? awayEntry(home, id, where) : undefined;
    if (entry?.route === 'recordRun') return { entry, where };
  }
  return undefined;
}
