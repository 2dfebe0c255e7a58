import knex, { type Knex } from 'knex';
import pg from 'pg';
import { LOCK } from './advisory-locks.js';
import { migrationSource } from './migration-source.js';

export type Db = Knex;

// A date is a day in a calendar: as a Date it would be local midnight, another day elsewhere.
pg.types.setTypeParser(pg.types.builtins.DATE, (text) => text);
// count(*) and bigint come as text so that nothing is rounded; ours stay far below 2^53, and one that does not is a fault.
pg.types.setTypeParser(pg.types.builtins.INT8, (text) => {
  const value = Number(text);
  if (!Number.isSafeInteger(value)) throw new RangeError(`The database answered a whole number that cannot be held exactly: ${text}`);
  return value;
});

const connectionsAtMost = 10;

/** Opens no connection yet: the first query does. */
export function openDb(url: string): Db {
  return knex({
    client: 'pg',
    connection: { connectionString: url, application_name: 'refettle', options: '-c TimeZone=UTC' },
    pool: { min: 0, max: connectionsAtMost },
    log: { warn },
    // An error's message is the statement without its values: addresses and hashes of passwords are among them.
    compileSqlOnError: false,
  });
}

/** knex writes its warnings to standard output. A refused connection is none: the query that wanted it fails with the reason. */
function warn(message: unknown): void {
  const text = String(message);
  if (!text.startsWith('Acquire connection error')) process.stderr.write(`${text}\n`);
}

interface ConnectionPool {
  acquireConnection(): Promise<unknown>;
  releaseConnection(connection: unknown): Promise<void>;
}

/** Brings the database to the newest shape. Several servers may do this at once: one works, the others wait. */
export async function migrate(db: Db): Promise<void> {
  const pool = db.client as ConnectionPool; // knex leaves it untyped
  const connection = await pool.acquireConnection();
  const onThisConnection = (sql: string): Promise<unknown> => db.raw(sql, [LOCK.migrations]).connection(connection);
  try {
    await onThisConnection('select pg_advisory_lock(?)');
    try {
      await db.migrate.latest({ migrationSource });
    } finally {
      await onThisConnection('select pg_advisory_unlock(?)');
    }
  } finally {
    await pool.releaseConnection(connection);
  }
}
