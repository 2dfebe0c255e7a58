import { readdirSync, rmSync } from 'node:fs';
import { join } from 'node:path';

/** How a backup is called in a folder of them: in the order in which they were made. */
export const backupNameOf = (now: Date): string => `refettle-${now.toISOString().replace(/\D/g, '').slice(0, 14)}.tar`;
export const BACKUP_NAME = /(^|\/)refettle-\d{14}\.tar$/;

/** Deletes all but the newest of the backups that have a name by their time; whatever else lies there stays. Answers what is gone. */
export function keepNewest(folder: string, howMany: number): string[] {
  const old = readdirSync(folder, { withFileTypes: true })
    .filter((entry) => entry.isFile() && BACKUP_NAME.test(entry.name))
    .map(({ name }) => name)
    .sort()
    .slice(0, -howMany);
  for (const name of old) rmSync(join(folder, name));
  return old;
}
