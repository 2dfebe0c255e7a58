import type { Knex } from 'knex';
import * as first from '../migrations/20261201090000_first.js';
import * as benchOfWork from '../migrations/20261201160000_bench_of_work.js';
import * as liveEvents from '../migrations/20261201134500_live_events.js';
import * as auditLog from '../migrations/20261201133000_audit_log.js';
import * as peopleAndSessions from '../migrations/20261201134600_people_and_sessions.js';
import * as runPeople from '../migrations/20261201134200_run_people.js';
import * as signingKeys from '../migrations/20261201134000_signing_keys.js';
import * as sharedBenches from '../migrations/20261201133500_shared_benches.js';
import * as runDamages from '../migrations/20261201172000_run_damages.js';

/**
 * Every migration, by name. A list in code and not a folder that is read: knex would store names with their extension, and a database
 * migrated from TypeScript would then be called corrupt by dist. A new migration is one file in migrations/ and one line here.
 */
const migrations: Record<string, Knex.Migration> = {
  '20261201090000_first': first,
  '20261201133000_audit_log': auditLog,
  '20261201134500_live_events': liveEvents,
  '20261201134600_people_and_sessions': peopleAndSessions,
  '20261201134200_run_people': runPeople,
  '20261201134000_signing_keys': signingKeys,
  '20261201133500_shared_benches': sharedBenches,
  '20261201160000_bench_of_work': benchOfWork,
  '20261201172000_run_damages': runDamages,
};

export const migrationSource: Knex.MigrationSource<string> = {
  getMigrations: () => Promise.resolve(Object.keys(migrations).sort()),
  getMigrationName: (name) => name,
  getMigration: (name) => {
    const migration = migrations[name];
    return migration ? Promise.resolve(migration) : Promise.reject(new Error(`There is no migration ${name}.`));
  },
};
