import { mkdirSync, openSync, closeSync, fsyncSync, readdirSync, readFileSync, renameSync, rmSync, writeSync } from 'node:fs';
import { homedir } from 'node:os';
import { dirname, join } from 'node:path';
import { BadInputError } from '../shared/errors.js';

export type Environment = Readonly<Record<string, string | undefined>>;

/** What a bench keeps on its own disk (REFETTLE_HOME): the sign-in, the journal, captures, copies for working offline. */
export interface Home {
  readonly folder: string;
  path(...parts: string[]): string;
}

export function homeOf(env: Environment): Home {
  const folder = env['REFETTLE_HOME'] ?? join(homedir(), '.refettle');
  return { folder, path: (...parts) => join(folder, ...parts) };
}

/** A folder of the home; made, for nobody but its owner, if it isn't there. */
export function makeFolder(folder: string): string {
  try {
    mkdirSync(folder, { recursive: true, mode: 0o700 });
  } catch (error) {
    throw notWritable(folder, error);
  }
  return folder;
}

/**
 * Writes a file so that after a crash it holds either the old text or the new, whole: written beside it, forced to the disk, renamed.
 * Readable by its owner only.
 */
export function writeWhole(file: string, text: string): void {
  makeFolder(dirname(file));
  const beside = `${file}.${process.pid}.new`;
  try {
    const descriptor = openSync(beside, 'w', 0o600);
    try {
      writeAll(descriptor, text);
      fsyncSync(descriptor);
    } finally {
      closeSync(descriptor);
    }
    renameSync(beside, file);
    syncFolder(dirname(file));
  } catch (error) {
    rmSync(beside, { force: true });
    throw notWritable(file, error);
  }
}

/** Writes all of it. A disk that is almost full takes a part of a text and says so only when asked for the rest. */
export function writeAll(descriptor: number, text: string): void {
  const bytes = Buffer.from(text);
  for (let at = 0; at < bytes.length;) at += writeSync(descriptor, bytes, at);
}

/** Forces a folder's list of names to the disk, so that a new or renamed file is still there after a power cut. */
export function syncFolder(folder: string): void {
  const descriptor = openSync(folder, 'r');
  try {
    fsyncSync(descriptor);
  } finally {
    closeSync(descriptor);
  }
}

/** Moves a file to another folder. Where it is gone, another terminal of this bench was quicker. */
export function moveIfThere(from: string, to: string): void {
  try {
    renameSync(from, to);
  } catch (error) {
    if ((error as NodeJS.ErrnoException).code !== 'ENOENT') throw error;
  }
  syncFolder(dirname(to));
  syncFolder(dirname(from));
}

/** The text of a file, or undefined where there is none. */
export function readIfThere(file: string): string | undefined {
  try {
    return readFileSync(file, 'utf8');
  } catch (error) {
    if ((error as NodeJS.ErrnoException).code === 'ENOENT') return undefined;
    throw new BadInputError(`it can't be read: ${(error as Error).message}`, { file });
  }
}

/** The names of the files in a folder, sorted; none where there is no folder. */
export function filesIn(folder: string): string[] {
  try {
    return readdirSync(folder, { withFileTypes: true })
      .filter((entry) => entry.isFile())
      .map((entry) => entry.name)
      .sort();
  } catch {
    return [];
  }
}

/** Nothing is said to be done that could not be written down: the work stops here. */
export function notWritable(file: string, error: unknown): BadInputError {
  const full = (error as NodeJS.ErrnoException | null)?.code === 'ENOSPC';
  const why = full ? 'the disk is full' : error instanceof Error ? error.message : String(error);
  return new BadInputError(
    `nothing can be written down there, so the work stops here (${why}). What was said to be recorded before is safe. Make room, or choose a folder you may write to (REFETTLE_HOME for what the bench keeps)`,
    { file },
  );
}
