import { existsSync, readFileSync, readdirSync, readlinkSync, realpathSync, rmSync } from 'node:fs';
import { basename, join } from 'node:path';
import { setTimeout as pause } from 'node:timers/promises';
import { SetUpError } from '../set-up-error.js';

const pauseMs = 50;
const stopsWhenToldMs = 30_000;

function linkTarget(path: string): string | undefined {
  try {
    return readlinkSync(path);
  } catch {
    return undefined; // gone in the meantime, or another user's
  }
}

/** PostgreSQL's processes work in the cluster's folder: that tells them from a stranger who was given an old number. */
function processesIn(folder: string): number[] {
  const place = realpathSync(folder);
  return readdirSync('/proc')
    .filter((name) => /^\d+$/.test(name))
    .filter((name) => linkTarget(`/proc/${name}/cwd`) === place && basename(linkTarget(`/proc/${name}/exe`) ?? '').startsWith('postgres'))
    .map(Number);
}

async function emptyWithin(folder: string, milliseconds: number): Promise<boolean> {
  const end = performance.now() + milliseconds;
  while (processesIn(folder).length > 0) {
    if (performance.now() > end) return false;
    await pause(pauseMs);
  }
  return true;
}

/** The number of the server that last ran in this cluster, from its own note. */
function notedProcess(pidFile: string): number | undefined {
  const number = existsSync(pidFile) ? Number(readFileSync(pidFile, 'utf8').split('\n')[0]) : NaN;
  return Number.isSafeInteger(number) && number > 0 ? number : undefined;
}

/** After a kill: ends a PostgreSQL that still runs in the folder, and clears a note that would keep a new one from starting. */
export async function settleLeftovers(folder: string): Promise<void> {
  const pidFile = join(folder, 'postmaster.pid');
  const server = notedProcess(pidFile);
  // Its fast shutdown; one whose server was killed a moment ago has been told already.
  if (server !== undefined && processesIn(folder).includes(server)) process.kill(server, 'SIGINT');
  if (!(await emptyWithin(folder, stopsWhenToldMs))) {
    const numbers = processesIn(folder).join(' ');
    throw new SetUpError(
      `An earlier PostgreSQL still works in ${folder} (process ${numbers}).`,
      `End it, then start again: kill -INT ${numbers}`,
    );
  }
  // Nobody works here any more. PostgreSQL clears a stale note itself, unless its number was given to another process since.
  rmSync(pidFile, { force: true });
}
