import { renameSync } from 'node:fs';
import { parse as parseYaml } from 'yaml';
import { BadInputError } from '../../shared/errors.js';
import { scriptSchema, type Script } from '../../shared/script/schema.js';
import type { Context } from '../context.js';
import { filesIn, makeFolder, readIfThere } from '../home.js';
import { unitLabel } from '../render/words.js';
import { lockOwner, type LockOwner } from './lock.js';
import { keepEntry, type OutboxEntry } from './outbox.js';
import { logOf, readRunJournal, type WrittenRun } from './run-journal.js';

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
    what: runWords(written),
    params: { number: header.unit },
    body: log,
  };
  keepEntry(home, entry);
  makeFolder(home.path('journal', 'closed'));
  renameSync(home.path('journal', `${header.id}.ndjson`), home.path('journal', 'closed', `${header.id}.ndjson`));
  return entry;
}

/** Closes the runs that had ended when the program was killed: nothing of them is left to do but to send them. */
export function closeEnded(context: Pick<Context, 'home' | 'stderr'>): OutboxEntry[] {
  return openRuns(context)
    .runs.filter(({ state }) => state === 'ended')
    .flatMap(({ written }) => {
      try {
        return [closeRun(context, written)];
      } catch (error) {
        if (!(error instanceof BadInputError)) throw error;
        context.stderr.say(
          `The ${runWords(written)} has ended and can't be closed: ${error.message}${error.file === undefined ? '' : ` (${error.file})`}`,
        );
        return [];
      }
    });
}
