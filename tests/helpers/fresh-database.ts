import { randomBytes } from 'node:crypto';
import { inject } from 'vitest';
import { openDb, type Db } from '../../server/db.js';
import { templateName, urlOfDatabase } from './database-cluster.js';

export interface FreshDatabase {
  db: Db;
  url: string;
  /** In `afterAll`: closes the connections and drops the database. */
  drop(): Promise<void>;
}

/** A database of its own for one test file, migrated and otherwise empty; `empty` leaves it without a table. */
export async function freshDatabase(options: { empty?: boolean } = {}): Promise<FreshDatabase> {
  const name = `test_${randomBytes(6).toString('hex')}`;
  const clusterUrl = inject('clusterUrl');
  const inMaintenance = async (sql: string, names: string[]): Promise<void> => {
    const maintenance = openDb(clusterUrl);
    try {
      await maintenance.raw(sql, names);
    } finally {
      await maintenance.destroy();
    }
  };
  await inMaintenance('create database ?? template ??', [name, options.empty ? 'template0' : templateName]);
  const url = urlOfDatabase(clusterUrl, name);
  const db = openDb(url);
  return {
    db,
    url,
    async drop() {
      await db.destroy();
      await inMaintenance('drop database ?? with (force)', [name]);
    },
  };
}
