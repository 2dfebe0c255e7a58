import { chmodSync, copyFileSync, existsSync, mkdirSync } from 'node:fs';
import { dirname, join, relative, sep } from 'node:path';
import type { Db } from '../db.js';
import { findShop } from '../history/shop-store.js';
import { migrationSource } from '../migration-source.js';
import { SetUpError } from '../set-up-error.js';
import { fileIsThere, filesBelow, inWorkshop, pack } from './archive.js';
import { BACKUP_NAME } from './backup-folder.js';
import { dumpDatabase, majorOf } from './database-tools.js';
import { DATABASE, FILES, type Manifest } from './manifest.js';

interface Backup {
  db: Db;
  databaseUrl: string;
  dataDir: string;
  file: string;
  now: Date;
  env: NodeJS.ProcessEnv;
}

export interface BackupMade {
  file: string;
  manifest: Manifest;
  files: string[];
}

/** The database's own files are in the dump; its password and its logs belong to one machine. */
const OF_THE_MACHINE = /^(postgres\/|postgres-|postgres\.log|\.refettle-backup-|before-restore-)|\.new$/;
/** Settings that a shop needs to be the same again. DATABASE_URL holds a password and is left out. */
const SETTINGS = /^(HOST|PORT|PUBLIC_HOST|PUBLIC_PORT|TLS_CERT|TLS_KEY|TRUSTED_PROXIES|REFETTLE_(DATA|DEMO|PUBLIC_URL))$/;

/**
 * What of the data folder goes into a backup: signing key, demo accounts, and whatever else lies there but for the database's own, and for
 * backups: each would hold all before it. `target`: where this one goes.
 */
export function filesToKeep(dataDir: string, target?: string): string[] {
  const folder = target === undefined ? '' : relative(dataDir, dirname(target)).split(sep).join('/');
  const isOfBackups = (name: string): boolean => BACKUP_NAME.test(name) || (folder !== '' && name === `${folder}/`);
  return filesBelow(dataDir, (name) => OF_THE_MACHINE.test(name) || isOfBackups(name));
}

export const countsOf = async (db: Db): Promise<Manifest['counts']> => {
  const count = async (table: string): Promise<number> => {
    if (!(await db.schema.hasTable(table))) return 0;
    const [row] = await db(table).count<{ count: number }[]>({ count: '*' });
    return Number(row?.count ?? 0);
  };
  return { people: await count('people'), units: await count('units'), tags: await count('tags') };
};

/** One file with everything that the shop is: written whole, for its owner only, or not at all. */
export async function makeBackup({ db, databaseUrl, dataDir, file, now, env }: Backup): Promise<BackupMade> {
  if (existsSync(file)) throw fileIsThere(file);
  if (!existsSync(dirname(file))) throw new SetUpError(`There is no folder ${dirname(file)}.`, 'Name a file in a folder that is there.');
  const migrations = (await db.schema.hasTable('knex_migrations'))
    ? await db('knex_migrations').orderBy('name').pluck<string[]>('name')
    : [];
  if (migrations.length === 0) throw new SetUpError('There is no shop in this database yet.', 'Start it once: npm start.');
  const ours = await migrationSource.getMigrations([]);
  const strange = migrations.find((name) => !ours.includes(name));
  if (strange !== undefined)
    throw new SetUpError(
      `The database is newer than this Refettle: it has been through ${strange}.`,
      'Make the backup with the newer one.',
    );
  const shop = migrations.length === ours.length ? await findShop(db) : undefined;
  const manifest: Manifest = {
    format: 'refettle.backup',
    version: 1,
    madeAt: now.toISOString(),
    migrations,
    postgresMajor: await majorOf(databaseUrl),
    ...(shop ? { shop: { name: shop.name, demo: shop.demo } } : {}),
    counts: await countsOf(db),
    settings: Object.fromEntries(
      Object.entries(env).filter((pair): pair is [string, string] => SETTINGS.test(pair[0]) && Boolean(pair[1])),
    ),
  };
  const files = filesToKeep(dataDir, file);
  await inWorkshop(dirname(file), async (workshop) => {
    const content = join(workshop, 'content');
    mkdirSync(content, { mode: 0o700 });
    await dumpDatabase(databaseUrl, join(content, DATABASE));
    for (const name of files) copyTo(join(content, FILES, name), join(dataDir, name));
    await pack(content, manifest, file);
  });
  return { file, manifest, files };
}

function copyTo(target: string, source: string): void {
  mkdirSync(dirname(target), { recursive: true, mode: 0o700 });
  copyFileSync(source, target);
  chmodSync(target, 0o600);
}
