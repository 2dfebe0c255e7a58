import { existsSync, readdirSync } from 'node:fs';
import { delimiter, join } from 'node:path';
import { SetUpError } from '../set-up-error.js';

/** Where Debian and Ubuntu put the servers, one folder a major version; they are not on the PATH. */
const debianFolder = '/usr/lib/postgresql';

function debianVersions(): string[] {
  if (!existsSync(debianFolder)) return [];
  return readdirSync(debianFolder).sort((left, right) => Number(right) - Number(left));
}

/**
 * The folder of initdb and postgres, the newest version first. A cluster that exists can only be served by the version that made it:
 * give that one. `PG_BIN` names a folder of one's own.
 */
export function findBinaries(clusterVersion?: string): string {
  const folders = [
    process.env.PG_BIN,
    ...(clusterVersion ? [clusterVersion] : debianVersions()).map((version) => join(debianFolder, version, 'bin')),
    ...(clusterVersion ? [] : (process.env.PATH ?? '').split(delimiter)),
  ];
  const found = folders.find((folder) => folder && existsSync(join(folder, 'initdb')) && existsSync(join(folder, 'postgres')));
  if (found) return found;
  const name = clusterVersion ? `postgresql-${clusterVersion}` : 'postgresql';
  throw new SetUpError(
    clusterVersion ? `The database was made by PostgreSQL ${clusterVersion}, which is not installed.` : 'PostgreSQL is not installed.',
    `Install it: apt-get install -y --no-install-recommends ${name} (or set PG_BIN to the folder of initdb and postgres).`,
  );
}
