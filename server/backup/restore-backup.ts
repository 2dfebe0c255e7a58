import { existsSync, mkdirSync, renameSync, rmSync } from 'node:fs';
import { dirname, join } from 'node:path';
import { revokeEveryBench } from '../auth/bench-store.js';
import { deleteFirstAdminLinks } from '../auth/first-admin.js';
import { listActivePeople } from '../auth/people-store.js';
import { deleteEveryLink } from '../auth/person-links.js';
import { revokeEverySession } from '../auth/session-store.js';
import { whileHolding } from '../database-hold.js';
import { migrate, openDb, type Db } from '../db.js';
import { audit } from '../history/audit.js';
import { readShop } from '../history/shop-store.js';
import { migrationSource } from '../migration-source.js';
import { SetUpError } from '../set-up-error.js';
import { filesBelow, inWorkshop, unpack } from './archive.js';
import { majorOf, replaceDatabase } from './database-tools.js';
import { countsOf, filesToKeep, makeBackup } from './make-backup.js';
import { DATABASE, FILES, type Manifest } from './manifest.js';

interface Restore {
  databaseUrl: string;
  dataDir: string;
  file: string;
  /** Also where a shop with people or units stands already: it is kept in a backup of its own first. */
  replace: boolean;
  now: Date;
  env: NodeJS.ProcessEnv;
}

export interface Restored {
  manifest: Manifest;
  files: string[];
  /** Migrations that the database went through after it was restored. */
  migrated: string[];
  /** Where what was there before is kept: a backup of the database, a folder of the files. */
  kept: { backup?: string; files?: string };
  /** What opened the shop at the time of the backup and opens it no more. */
  ended: { sessions: number; links: number; benches: string[] };
  /** Who may sign in again, as it was then. */
  active: { name: string; role: string }[];
}

/**
 * Brings a shop back from one file. Nothing is touched before every byte of it was checked; the database changes as one, or not at all, and
 * nobody else works with it until all is done.
 */
export async function restoreBackup(asked: Restore): Promise<Restored> {
  const { databaseUrl, dataDir, file } = asked;
  return inWorkshop(dataDir, async (workshop) => {
    const content = join(workshop, 'content');
    const manifest = await unpack(file, content);
    const migrated = await refuseNewer(file, manifest, databaseUrl);
    return whileHolding(databaseUrl, 'alone', async () => ({
      manifest,
      migrated,
      ...(await putInPlace(asked, manifest, workshop, content)),
    }));
  });
}

async function putInPlace(
  { databaseUrl, dataDir, replace, now, env }: Restore,
  manifest: Manifest,
  workshop: string,
  content: string,
): Promise<Omit<Restored, 'manifest' | 'migrated'>> {
  const mark = `before-restore-${now.toISOString().replace(/\D/g, '').slice(0, 14)}`;
  const db = openDb(databaseUrl);
  try {
    const backup = await keepWhatIsThere(db, { databaseUrl, dataDir, file: join(dataDir, `${mark}.tar`), now, env }, replace);
    try {
      await replaceDatabase(databaseUrl, join(content, DATABASE), workshop);
    } catch (cause) {
      throw new SetUpError(
        `The database could not be restored, and nothing was changed. ${cause instanceof Error ? cause.message : String(cause)}`,
        'Look at what PostgreSQL says above.',
        { cause },
      );
    }
    await migrate(db);
    const access = await settleAccess(db, manifest, now);
    const kept = keepFiles(dataDir, mark);
    const files = placeFiles(join(content, FILES), dataDir);
    return { files, kept: { ...(backup ? { backup } : {}), ...(kept ? { files: kept } : {}) }, ...access };
  } finally {
    await db.destroy();
  }
}

/** The migrations that the backup still has to go through. */
async function refuseNewer(file: string, manifest: Manifest, databaseUrl: string): Promise<string[]> {
  const ours = await migrationSource.getMigrations([]);
  const unknown = manifest.migrations.filter((name) => !ours.includes(name));
  if (unknown.length > 0) {
    throw new SetUpError(
      `${file} was made by a newer Refettle: its database has been through ${unknown.join(', ')}, which this one does not know.`,
      'Nothing was touched. Bring this checkout to that version, then restore.',
    );
  }
  const major = await majorOf(databaseUrl);
  if (manifest.postgresMajor > major) {
    throw new SetUpError(
      `${file} comes from PostgreSQL ${String(manifest.postgresMajor)}, and the database here is PostgreSQL ${String(major)}.`,
      `Nothing was touched. Restore it where PostgreSQL ${String(manifest.postgresMajor)} or newer runs.`,
    );
  }
  return ours.filter((name) => !manifest.migrations.includes(name));
}

async function keepWhatIsThere(
  db: Db,
  backup: Omit<Parameters<typeof makeBackup>[0], 'db'>,
  replace: boolean,
): Promise<string | undefined> {
  const { people, units } = await countsOf(db);
  if (people === 0 && units === 0) return undefined;
  if (!replace) {
    throw new SetUpError(
      `There is a shop here already, with ${String(people)} people and ${String(units)} units.`,
      'Nothing was touched. To put the backup in its place: npm run restore -- FILE --replace. What is there now is kept in a backup first.',
    );
  }
  await makeBackup({ db, ...backup });
  return backup.file;
}

/** Files of the shop that was there are moved aside, never written over. */
function keepFiles(dataDir: string, mark: string): string | undefined {
  const names = filesToKeep(dataDir);
  for (const name of names) move(join(dataDir, name), join(dataDir, mark, name));
  return names.length > 0 ? join(dataDir, mark) : undefined;
}

function placeFiles(from: string, dataDir: string): string[] {
  const names = existsSync(from) ? filesBelow(from) : [];
  for (const name of names) move(join(from, name), join(dataDir, name));
  return names;
}

function move(source: string, target: string): void {
  mkdirSync(dirname(target), { recursive: true, mode: 0o700 });
  rmSync(target, { force: true });
  renameSync(source, target);
}

/**
 * A backup knows nothing of what was revoked after it: a session that was ended, the token of a stolen bench, a link that was used. None of
 * them lives again; people come back by their passwords. Who was deactivated since is active again, which only a person can put right.
 */
function settleAccess(db: Db, { madeAt, migrations }: Manifest, now: Date): Promise<Pick<Restored, 'ended' | 'active'>> {
  return db.transaction(async (trx) => {
    await deleteFirstAdminLinks(trx);
    const ended = {
      sessions: await revokeEverySession(trx, now),
      links: await deleteEveryLink(trx, now),
      benches: await revokeEveryBench(trx, now),
    };
    const { name } = await readShop(trx);
    await audit(trx, {
      who: undefined,
      what: 'backup.restored',
      subject: { kind: 'shop', id: 'shop', name },
      after: {
        madeAt,
        newestMigration: migrations.at(-1) ?? '',
        sessionsEnded: ended.sessions,
        linksEnded: ended.links,
        benchesEnded: ended.benches.length,
      },
      at: now,
    });
    const people = await listActivePeople(trx);
    return { ended, active: people.map(({ name: called, role }) => ({ name: called, role })) };
  });
}
