import type { Knex } from 'knex';

/** Who had a hand in a run, by which edition of the sheet it was run, and what the bench's clock did meanwhile. */
export async function up(knex: Knex): Promise<void> {
  await knex.raw(`
    alter table runs
      add column people jsonb not null default '[]',
      add column sheet_edition integer,
      add column clock_jumps jsonb;
  `);
}

export async function down(knex: Knex): Promise<void> {
  await knex.raw('alter table runs drop column people, drop column sheet_edition, drop column clock_jumps');
}
