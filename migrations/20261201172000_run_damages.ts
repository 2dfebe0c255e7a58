import type { Knex } from 'knex';

/** Lines of a bench's journal that did not hold together, and what was found behind them. */
export async function up(knex: Knex): Promise<void> {
  await knex.raw('alter table runs add column damages jsonb');
}

export async function down(knex: Knex): Promise<void> {
  await knex.raw('alter table runs drop column damages');
}
