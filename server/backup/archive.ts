import { createHash } from 'node:crypto';
import {
  chmodSync,
  closeSync,
  createReadStream,
  existsSync,
  fsyncSync,
  linkSync,
  lstatSync,
  mkdirSync,
  mkdtempSync,
  openSync,
  readdirSync,
  readFileSync,
  rmSync,
  writeFileSync,
} from 'node:fs';
import { dirname, join, relative, sep } from 'node:path';
import { pipeline } from 'node:stream/promises';
import { execa } from 'execa';
import { SetUpError } from '../set-up-error.js';
import { CHECKSUMS, MANIFEST, manifestSchema, type Manifest } from './manifest.js';

const OWNER_ONLY = 0o600;

/** A folder beside the file, for nobody else, gone afterwards whatever happens. */
export async function inWorkshop<T>(beside: string, work: (folder: string) => Promise<T>): Promise<T> {
  const folder = mkdtempSync(join(beside, '.refettle-backup-'));
  chmodSync(folder, 0o700);
  try {
    return await work(folder);
  } finally {
    rmSync(folder, { recursive: true, force: true });
  }
}

/** Every regular file below a folder, by its path from there, sorted. Links and sockets are no files. */
export function filesBelow(folder: string, leaveOut: (name: string) => boolean = () => false, from = folder): string[] {
  return readdirSync(from, { withFileTypes: true })
    .flatMap((entry) => {
      const path = join(from, entry.name);
      const name = relative(folder, path).split(sep).join('/');
      if (entry.isDirectory()) return leaveOut(`${name}/`) ? [] : filesBelow(folder, leaveOut, path);
      return entry.isFile() && !leaveOut(name) ? [name] : [];
    })
    .sort();
}

async function sha256(path: string): Promise<string> {
  const hash = createHash('sha256');
  await pipeline(createReadStream(path), hash);
  return hash.digest('hex');
}

/**
 * Packs a folder into one file, owner only. It appears under its name when it is whole and on the disk, and never takes the place of
 * another.
 */
export async function pack(folder: string, manifest: Manifest, file: string): Promise<void> {
  writeFileSync(join(folder, MANIFEST), `${JSON.stringify(manifest, null, 2)}\n`, { mode: OWNER_ONLY });
  const lines: string[] = [];
  for (const name of filesBelow(folder)) lines.push(`${await sha256(join(folder, name))}  ${name}\n`);
  writeFileSync(join(folder, CHECKSUMS), lines.join(''), { mode: OWNER_ONLY });
  await inWorkshop(dirname(file), async (workshop) => {
    const packed = join(workshop, 'packed.tar');
    closeSync(openSync(packed, 'wx', OWNER_ONLY));
    // The manifest and the checksums come first: they can be read without unpacking the rest.
    const rest = readdirSync(folder)
      .filter((name) => name !== MANIFEST && name !== CHECKSUMS)
      .sort();
    await execa('tar', ['--create', '--file', packed, '--numeric-owner', '--directory', folder, '--', MANIFEST, CHECKSUMS, ...rest]);
    sync(packed);
    try {
      linkSync(packed, file);
    } catch (cause) {
      if ((cause as NodeJS.ErrnoException).code === 'EEXIST') throw fileIsThere(file, cause);
      throw cause;
    }
    sync(dirname(file));
  });
}

export const fileIsThere = (file: string, cause?: unknown): SetUpError =>
  new SetUpError(`There is a file ${file} already.`, 'Name another one, or move it away: a backup never takes the place of another.', {
    cause,
  });

function sync(path: string): void {
  const descriptor = openSync(path, 'r');
  try {
    fsyncSync(descriptor);
  } finally {
    closeSync(descriptor);
  }
}

const broken = (file: string, what: string, cause?: unknown): SetUpError =>
  new SetUpError(`${file} is no backup that can be used: ${what}.`, 'Nothing was touched. Take another copy of it, or an earlier backup.', {
    cause,
  });

/** Unpacks a backup into a folder and checks every byte of it. Refuses what is cut off, changed, or more than was packed. */
export async function unpack(file: string, folder: string): Promise<Manifest> {
  if (!existsSync(file)) throw new SetUpError(`There is no file ${file}.`, 'Name the backup: npm run restore -- FILE.');
  mkdirSync(folder, { recursive: true, mode: 0o700 });
  const names = await namesIn(file);
  // Whoever made the file up could name a place outside.
  if (names.some((name) => name.startsWith('/') || name.split('/').includes('..'))) throw broken(file, 'it names files outside of itself');
  try {
    await execa('tar', ['--extract', '--file', file, '--no-same-owner', '--no-same-permissions', '--directory', folder]);
  } catch (cause) {
    throw broken(file, 'it is cut off or damaged', cause);
  }
  const sums = checksumsIn(file, folder);
  const there = filesBelow(folder).filter((name) => name !== CHECKSUMS);
  const strange = there.find((name) => !sums.has(name));
  if (strange !== undefined) throw broken(file, `it holds ${strange}, which was not packed`);
  for (const [name, expected] of sums) {
    const path = join(folder, name);
    if (!there.includes(name) || !lstatSync(path).isFile()) throw broken(file, `${name} is missing`);
    if ((await sha256(path)) !== expected) throw broken(file, `${name} was changed since it was made (its checksum is another)`);
  }
  return manifestIn(file, folder);
}

async function namesIn(file: string): Promise<string[]> {
  try {
    return (await execa('tar', ['--list', '--file', file])).stdout.split('\n');
  } catch (cause) {
    throw broken(file, 'it is no tar file, or cut off', cause);
  }
}

function checksumsIn(file: string, folder: string): Map<string, string> {
  const path = join(folder, CHECKSUMS);
  if (!existsSync(path)) throw broken(file, `it has no ${CHECKSUMS}`);
  const lines = readFileSync(path, 'utf8')
    .split('\n')
    .filter((line) => line !== '');
  return new Map(
    lines.map((line) => {
      const [, sum, name] = /^([0-9a-f]{64}) {2}(.+)$/.exec(line) ?? [];
      if (sum === undefined || name === undefined) throw broken(file, `${CHECKSUMS} can't be read`);
      return [name, sum];
    }),
  );
}

function manifestIn(file: string, folder: string): Manifest {
  try {
    return manifestSchema.parse(JSON.parse(readFileSync(join(folder, MANIFEST), 'utf8')));
  } catch (cause) {
    throw broken(file, `its ${MANIFEST} is not one that this Refettle understands`, cause);
  }
}
