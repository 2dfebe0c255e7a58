import type { Knex } from 'knex';
import * as first from '../migrations/20261201090000_first.js';
import * as auditLog from '../migrations/20261201133000_audit_log.js';

/**
 * Every migration, by name. A list in code and not a folder that is read: knex would store names with their extension, and a database
 * migrated from TypeScript would then be called corrupt by dist. A new migration is one file in migrations/ and one line here.
 */
const migrations: Record<string, Knex.Migration> = {
  '20261201090000_first': first,
  '20261201133000_audit_log': auditLog,
};

export const migrationSource: Knex.MigrationSource<string> = {
  getMigrations: () => Promise.resolve(Object.keys(migrations).sort()),
  getMigrationName: (name) => name,
  getMigration: (name) => {
    const migration = migrations[name];
    return migration ? Promise.resolve(migration) : Promise.reject(new Error(`There is no migration ${name}.`));
  },
};
