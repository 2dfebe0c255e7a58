import type { Knex } from 'knex';

const TABLES = ['unit_events', 'captures', 'runs'];

/**
 * At which shared bench it was recorded; null: by somebody's own sign-in, or before this was kept. The server names the bench once a
 * transaction (server/route.ts), so that no feature can forget it, and a server of before leaves it null.
 */
export async function up(knex: Knex): Promise<void> {
  for (const table of TABLES)
    await knex.raw(`
      alter table ${table} add column bench_id uuid references benches;
      alter table ${table} alter column bench_id set default nullif(current_setting('refettle.bench', true), '')::uuid;
    `);
}

export async function down(knex: Knex): Promise<void> {
  for (const table of TABLES) await knex.raw(`alter table ${table} drop column bench_id`);
}
