import { chmodSync, existsSync, mkdirSync, mkdtempSync, readFileSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { SetUpError } from '../set-up-error.js';
import { startCluster, type Cluster } from './cluster.js';
import { canReach, ownerOfCluster, ownerOfNewCluster } from './owner.js';

/**
 * The database of the data folder, made at the first start. As root PostgreSQL runs as another user, who may be unable to walk to the data
 * folder (a checkout below /root, which is closed to others): then the database lies in `elsewhere`, and a note in the data folder says so.
 */
export async function startOwnCluster(dataDir: string, elsewhere = '/var/lib/refettle'): Promise<Cluster> {
  const note = noteIn(dataDir);
  const folder = findFolder(dataDir, note) ?? chooseFolder(dataDir, elsewhere);
  const cluster = await startCluster(
    { folder, passwordFile: join(dataDir, 'postgres-password'), logFile: join(dataDir, 'postgres.log') },
    { durable: true },
  );
  if (folder !== inside(dataDir)) writeFileSync(note, `${folder}\n`);
  return cluster;
}

/** Where the data folder's database is, or undefined before the first start. */
export const folderOfOwnCluster = (dataDir: string): string | undefined => findFolder(dataDir, noteIn(dataDir));

const noteIn = (dataDir: string): string => join(dataDir, 'postgres-folder.txt');
const inside = (dataDir: string): string => join(dataDir, 'postgres');

function findFolder(dataDir: string, note: string): string | undefined {
  const noted = existsSync(note) ? readFileSync(note, 'utf8').trim() : undefined;
  if (noted !== undefined && !existsSync(noted)) {
    throw new SetUpError(
      `The database is gone: ${note} says that it is in ${noted}.`,
      `Put that folder back, or move ${dataDir} aside to begin with an empty database.`,
    );
  }
  const folder = noted ?? (existsSync(inside(dataDir)) ? inside(dataDir) : undefined);
  if (folder !== undefined && !canReach(ownerOfCluster(folder), folder)) {
    throw new SetUpError(
      `The user whom the database in ${folder} belongs to can't get there: a folder above it is closed to others.`,
      'Let others pass through the folders above it (chmod o+x), then start again.',
    );
  }
  return folder;
}

function chooseFolder(dataDir: string, elsewhere: string): string {
  if (canReach(ownerOfNewCluster(), dataDir)) return inside(dataDir);
  mkdirSync(elsewhere, { recursive: true, mode: 0o755 });
  // A new name each time: a checkout that was thrown away may have left its database under the same path.
  const place = mkdtempSync(join(elsewhere, 'shop-'));
  chmodSync(place, 0o711);
  return join(place, 'postgres');
}
