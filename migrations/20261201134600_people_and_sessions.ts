import type { Knex } from 'knex';

// Invited people have no password yet; sessions can be told apart, named from where, and ended one by one; one-time links for people.
export async function up(knex: Knex): Promise<void> {
  await knex.raw(`
    alter table people alter column password_hash drop not null;

    -- The default is for what a server of before inserts while it still runs beside this one.
    alter table sessions
      add column id uuid not null unique default gen_random_uuid(),
      add column used_from text not null default 'unknown',
      add column last_used_at timestamptz;

    create table person_links (
      token_hash bytea primary key,
      person_id uuid not null unique references people,
      kind text not null check (kind in ('invitation', 'reset')),
      made_by uuid not null references people,
      created_at timestamptz not null,
      expires_at timestamptz not null
    );
  `);
}

export async function down(knex: Knex): Promise<void> {
  await knex.raw(`
    drop table person_links;
    alter table sessions drop column id, drop column used_from, drop column last_used_at;
    -- A hash that no password fits: whoever was invited still cannot sign in.
    update people set password_hash = 'none' where password_hash is null;
    alter table people alter column password_hash set not null;
  `);
}
