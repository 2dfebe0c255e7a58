import { parse as parseYaml } from 'yaml';
import { BadInputError } from '../../shared/errors.js';
import { scriptSchema, type Script } from '../../shared/script/schema.js';
import type { Context } from '../context.js';
import { filesIn, makeFolder, moveIfThere, readIfThere, type Home } from '../home.js';
import { unitLabel } from '../render/words.js';
import { lockOwner, takeLock, type LockOwner } from './lock.js';
import { withoutLostCaptures } from './lost-captures.js';
import { awayEntry, keepEntry, type OutboxEntry } from './outbox.js';
import { journalFileOf, logOf, readRunJournal, writtenRun, type WrittenRun } from './run-journal.js';

/** The lock of a run: whoever holds it writes its journal. */
export const runLock = (runId: string): string => `run-${runId}`;
export const rigLock = (rigName: string): string => `rig-${rigName}`;

export interface OpenRun {
  written: WrittenRun;
  /** Its own copy of the script; undefined where this version can't read it. */
  script: Script | undefined;
  /** `ended`: done, and not yet made into a message. */
  state: 'going' | 'parked' | 'broken off' | 'ended';
  /** Who runs it, while it is going. */
  owner: LockOwner | undefined;
  /** Steps that are done, of how many. */
  done: number;
  of: number | undefined;
}

/** The runs of this bench that are not closed, oldest first, and the journals that can't be read. */
export function openRuns(context: Pick<Context, 'home' | 'stderr'>): { runs: OpenRun[]; unreadable: string[] } {
  const { home } = context;
  const runs: OpenRun[] = [];
  const unreadable: string[] = [];
  for (const name of filesIn(home.path('journal')).filter((file) => file.endsWith('.ndjson'))) {
    const file = home.path('journal', name);
    const text = readIfThere(file);
    if (text === undefined) continue; // closed by another terminal just now
    const written = readRunJournal(text);
    if (!written) unreadable.push(file);
    else runs.push(openRunOf(context, written));
  }
  runs.sort((a, b) => a.written.header.startedAt.localeCompare(b.written.header.startedAt));
  return { runs, unreadable };
}

function openRunOf(context: Pick<Context, 'home' | 'stderr'>, written: WrittenRun): OpenRun {
  const owner = lockOwner(context, runLock(written.header.id));
  const script = scriptOf(written);
  const state = owner ? 'going' : written.end ? 'ended' : written.stop?.how === 'parked' ? 'parked' : 'broken off';
  return { written, script, owner, state, done: doneIn(written).size, of: script?.steps.length };
}

/** The steps that have a result of their own. */
export const doneIn = ({ results }: Pick<WrittenRun, 'results'>): Set<string> =>
  new Set(results.filter(({ kind }) => kind !== 'cut').map(({ stepId }) => stepId));

function scriptOf({ header }: WrittenRun): Script | undefined {
  try {
    return scriptSchema.safeParse(parseYaml(header.script.text)).data;
  } catch {
    return undefined;
  }
}

/** A run in words: `bench run h6-find on No. 0412`. */
export const runWords = ({ header }: Pick<WrittenRun, 'header'>): string => `bench run ${header.script.name} on ${unitLabel(header.unit)}`;

/**
 * Makes a run that was written down into an entry of the outbox, and puts its journal away. Doing it twice does no harm:
 * the same journal gives the same message with the same key, and one that is sent or given up already is left where it is.
 * A capture whose file is gone is left out of it, which is said here and in the log.
 */
export function closeRun({ home, stderr }: Pick<Context, 'home' | 'stderr'>, whole: WrittenRun): OutboxEntry {
  const { written, lost } = withoutLostCaptures(home, whole);
  const { header } = written;
  const away = awayEntry(home, header.id, 'sent') ?? awayEntry(home, header.id, 'dropped');
  for (const { title, file } of away ? [] : lost)
    stderr.say(`The capture of step '${title}' is gone (${file}): the ${runWords(written)} goes without it, and its log says so.`);
  const entry = away ?? messageOf(home, written);
  if (!away) keepEntry(home, entry);
  makeFolder(home.path('journal', 'closed'));
  moveIfThere(journalFileOf(home, header.id), home.path('journal', 'closed', `${header.id}.ndjson`));
  return entry;
}

function messageOf(home: Home, written: WrittenRun): OutboxEntry {
  const { header } = written;
  const log = logOf(home, written);
  return {
    route: 'recordRun',
    id: header.id,
    madeAt: log.endedAt,
    server: header.server,
    by: header.by,
    what: runWords(written),
    params: { number: header.unit },
    body: log,
  };
}

/** Closes the runs that had ended when the program was killed: nothing of them is left to do but to send them. */
export async function closeEnded(context: Context): Promise<OutboxEntry[]> {
  const closed: OutboxEntry[] = [];
  for (const { written } of openRuns(context).runs.filter(({ state }) => state === 'ended')) {
    const { id } = written.header;
    const lock = await takeLock(context, runLock(id), { what: `${runWords(written)}, being closed`, run: id });
    // Another terminal is closing it.
    if ('owner' in lock) continue;
    try {
      // Nor is it there any more where another one has just done so.
      if (readIfThere(journalFileOf(context.home, id)) !== undefined) closed.push(closeRun(context, writtenRun(context.home, id)));
    } catch (error) {
      if (!(error instanceof BadInputError)) throw error;
      context.stderr.say(
        `The ${runWords(written)} has ended and can't be closed: ${error.message}${error.file === undefined ? '' : ` (${error.file})`}`,
      );
    } finally {
      lock.release();
    }
  }
  return closed;
}
