import { existsSync, readFileSync } from 'node:fs';
import { join } from 'node:path';
import type { Config } from '../config.js';
import { whileHolding } from '../database-hold.js';
import { holdDataFolder, makeDataFolder } from '../data-folder.js';
import { folderOfOwnCluster, startOwnCluster } from '../postgres/own-cluster.js';
import { urlOfCluster } from '../postgres/cluster.js';
import { SetUpError } from '../set-up-error.js';

/**
 * The shop's database, for a tool: DATABASE_URL's; or the cluster of the data folder, as the running server has it, or started for as long
 * as the tool works. `alone`: only while no server works in the data folder; such a tool holds the database itself, as it needs it.
 */
export async function withDatabase<T>(
  config: Config,
  { alone }: { alone: boolean },
  work: (databaseUrl: string) => Promise<T>,
): Promise<T> {
  makeDataFolder(config.dataDir);
  let hold: { release(): void } | undefined;
  try {
    hold = await holdDataFolder(config.dataDir);
  } catch (error) {
    if (alone || !(error instanceof SetUpError)) throw error;
  }
  const held = (databaseUrl: string): Promise<T> =>
    alone ? work(databaseUrl) : whileHolding(databaseUrl, 'with others', () => work(databaseUrl));
  try {
    if (config.databaseUrl !== undefined) return await held(config.databaseUrl);
    if (hold === undefined) return await held(runningCluster(config.dataDir));
    const cluster = await startOwnCluster(config.dataDir);
    try {
      return await held(cluster.url);
    } finally {
      await cluster.stop();
    }
  } finally {
    hold?.release();
  }
}

/** PostgreSQL notes its port and its state in postmaster.pid. */
function runningCluster(dataDir: string): string {
  const folder = folderOfOwnCluster(dataDir);
  const note = folder === undefined ? undefined : join(folder, 'postmaster.pid');
  const lines = note !== undefined && existsSync(note) ? readFileSync(note, 'utf8').split('\n') : [];
  if (lines[7]?.trim() !== 'ready')
    throw new SetUpError(`The server in ${dataDir} is only just starting or stopping.`, 'Try again in a moment.');
  return urlOfCluster(readFileSync(join(dataDir, 'postgres-password'), 'utf8').trim(), Number(lines[3]));
}
