import { renameSync } from 'node:fs';
import type { Context } from '../context.js';
import { filesIn, makeFolder, readIfThere } from '../home.js';
import { unitLabel } from '../render/words.js';
import { keepEntry, type OutboxEntry } from './outbox.js';
import { logOf, readRunJournal, type WrittenRun } from './run-journal.js';

/**
 * Makes a run that was written down into an entry of the outbox, and puts its journal away. Doing it twice does no harm:
 * the same journal gives the same message with the same key.
 */
export function closeRun({ home }: Pick<Context, 'home'>, written: WrittenRun): OutboxEntry {
  const { header } = written;
  const log = logOf(home, written);
  const entry: OutboxEntry = {
    route: 'recordRun',
    id: header.id,
    madeAt: log.endedAt,
    server: header.server,
    by: header.by,
    what: `bench run ${header.script.name} on ${unitLabel(header.unit)}`,
    params: { number: header.unit },
    body: log,
  };
  keepEntry(home, entry);
  makeFolder(home.path('journal', 'closed'));
  renameSync(home.path('journal', `${header.id}.ndjson`), home.path('journal', 'closed', `${header.id}.ndjson`));
  return entry;
}

/** Closes the runs that were broken off: the machine lost power, or the program was killed. Their steps up to there are kept. */
export function recoverRuns(context: Context): OutboxEntry[] {
  const recovered: OutboxEntry[] = [];
  for (const name of filesIn(context.home.path('journal')).filter((file) => file.endsWith('.ndjson'))) {
    const written = readRunJournal(readIfThere(context.home.path('journal', name)) ?? '');
    if (!written || isAlive(written.header.pid)) continue;
    const entry = closeRun(context, written);
    recovered.push(entry);
    context.stderr.say(
      `The ${entry.what}, begun ${written.header.startedAt}, was broken off. ${written.results.length} steps of it are kept; it is closed as interrupted.`,
    );
  }
  return recovered;
}

function isAlive(pid: number): boolean {
  if (pid === process.pid) return true;
  try {
    process.kill(pid, 0);
    return true;
  } catch (error) {
    return (error as NodeJS.ErrnoException).code === 'EPERM';
  }
}
