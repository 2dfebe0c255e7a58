// Who has a serial port. The driver locks a port it opens with flock; other programs keep a lock file in the old manner
// (`LCK..ttyUSB0`, Filesystem Hierarchy Standard 5.9: the process number in ten characters and a line end), or neither.
import { linkSync, readdirSync, readFileSync, readlinkSync, realpathSync, rmSync, statSync, writeFileSync } from 'node:fs';
import { basename, join } from 'node:path';

/** Where such lock files stand (FHS 3.0, 5.9 and 3.15). */
export const USUAL_LOCK_FOLDER = '/run/lock';
const PROCESS_NUMBER_WIDTH = 10;

/** A program that has a port. */
export interface Holder {
  processId: number;
  /** What it is called, where this machine tells. */
  program: string | undefined;
}

export const holderText = ({ processId, program }: Holder): string =>
  program === undefined ? `the process ${processId}` : `'${program}' (process ${processId})`;

/** The device behind a name such as `/dev/serial/by-id/…`. */
export function deviceOf(path: string): string {
  try {
    return realpathSync(path);
  } catch {
    return path;
  }
}

/** Who has the port: by its lock file, by the kernel's list of locks, or by who has it open. Undefined where nothing tells. */
export function holderOf(path: string, lockFolder: string = USUAL_LOCK_FOLDER): Holder | undefined {
  const device = deviceOf(path);
  const processId = lockFileHolder(device, lockFolder) ?? flockHolder(device) ?? processWithOpen(device);
  return processId === undefined ? undefined : { processId, program: programOf(processId) };
}

/** The living process, other than this one, that a port's lock file names. A lock file of a process that is gone is stale and counts for nothing. */
export function lockFileHolder(device: string, lockFolder: string): number | undefined {
  const text = textIfThere(lockFile(device, lockFolder));
  const processId = text === undefined ? NaN : Number(text.trim());
  return Number.isInteger(processId) && processId > 0 && processId !== process.pid && isAlive(processId) ? processId : undefined;
}

/**
 * Puts this program's lock file beside a port and gives back what takes it away. Does nothing where such files are not kept, or may not
 * be written: the driver's own lock holds all the same.
 */
export function takeLockFile(device: string, lockFolder: string): () => void {
  // Simulated ports are no devices.
  if (!device.startsWith('/dev/')) return () => undefined;
  const file = lockFile(device, lockFolder);
  const beside = `${file}.${process.pid}`;
  try {
    writeFileSync(beside, `${String(process.pid).padStart(PROCESS_NUMBER_WIDTH)}\n`, { mode: 0o644 });
    try {
      // A link is made whole or not at all, so that no half-written lock is ever seen.
      linkSync(beside, file);
    } catch {
      if (lockFileHolder(device, lockFolder) !== undefined) return () => undefined;
      rmSync(file, { force: true });
      linkSync(beside, file);
    }
  } catch {
    return () => undefined;
  } finally {
    rmSync(beside, { force: true });
  }
  const remove = (): void => {
    process.off('exit', remove);
    try {
      if (textIfThere(file)?.trim() === String(process.pid)) rmSync(file, { force: true });
    } catch {
      // A lock file that can't be taken away names a process that is gone, which everybody may pass over.
    }
  };
  process.on('exit', remove);
  return remove;
}

const lockFile = (device: string, lockFolder: string): string =>
  join(lockFolder, `LCK..${device.startsWith('/dev/') ? device.slice('/dev/'.length).replaceAll('/', '_') : basename(device)}`);

/** /proc/locks: `1: FLOCK  ADVISORY  WRITE 1234 00:18:5 0 EOF`: the process, then the file's device and inode (proc(5)). */
function flockHolder(device: string): number | undefined {
  try {
    const { ino } = statSync(device);
    for (const line of readFileSync('/proc/locks', 'utf8').split('\n')) {
      const [, kind, , , processId, file] = line.trim().split(/\s+/);
      if (kind === 'FLOCK' && file?.split(':')[2] === String(ino) && programHasOpen(Number(processId), device)) return Number(processId);
    }
  } catch {
    // No such list on this machine.
  }
  return undefined;
}

/** Another process that has the device open; of other people's processes only an administrator is told. */
function processWithOpen(device: string): number | undefined {
  try {
    return readdirSync('/proc')
      .filter((name) => /^\d+$/.test(name) && Number(name) !== process.pid)
      .map(Number)
      .find((processId) => programHasOpen(processId, device) === 'yes');
  } catch {
    return undefined;
  }
}

/** `unknown`: that process may not be looked into. */
function programHasOpen(processId: number, device: string): 'yes' | 'unknown' | undefined {
  const folder = `/proc/${processId}/fd`;
  let names: string[];
  try {
    names = readdirSync(folder);
  } catch {
    return 'unknown';
  }
  return names.some((name) => linkOf(join(folder, name)) === device) ? 'yes' : undefined;
}

function linkOf(path: string): string | undefined {
  try {
    return readlinkSync(path);
  } catch {
    return undefined;
  }
}

/** The command as it was typed, shortened to its program and first word: `node refettle.js run …` says more than `node`. */
function programOf(processId: number): string | undefined {
  const words = textIfThere(`/proc/${processId}/cmdline`)?.split('\0').filter(Boolean);
  const [first, ...rest] = words ?? [];
  if (first === undefined) return textIfThere(`/proc/${processId}/comm`)?.trim() || undefined;
  const script = /^(?:node|bash|sh|python3?)$/.test(basename(first)) ? rest.find((word) => !word.startsWith('-')) : undefined;
  const shown = script === undefined ? basename(first) : `${basename(first)} ${basename(script)}`;
  return shown.replace(/[^\x20-\x7e]/g, '?');
}

function isAlive(processId: number): boolean {
  try {
    process.kill(processId, 0);
    return true;
  } catch (error) {
    // It is there, and somebody else's.
    return (error as NodeJS.ErrnoException).code === 'EPERM';
  }
}

function textIfThere(file: string): string | undefined {
  try {
    return readFileSync(file, 'utf8');
  } catch {
    return undefined;
  }
}
