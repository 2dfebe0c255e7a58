import type { Knex } from 'knex';

/** Shared benches: a token of their own, who has signed on at them, and PINs. */
export async function up(knex: Knex): Promise<void> {
  await knex.raw(`
    create table benches (
      id uuid primary key,
      name text not null,
      name_key text not null unique,
      -- Null once it is revoked: a token that is gone cannot come back.
      token_hash bytea unique,
      made_at timestamptz not null,
      made_by uuid not null references people,
      made_by_role text not null,
      last_seen_at timestamptz,
      revoked_at timestamptz,
      rig jsonb,
      rig_reported_at timestamptz,
      check ((token_hash is null) = (revoked_at is not null))
    );

    create table bench_people (
      bench_id uuid not null references benches,
      person_id uuid not null references people,
      first_signed_on_at timestamptz not null,
      last_signed_on_at timestamptz not null,
      primary key (bench_id, person_id)
    );
    create index bench_people_of_person on bench_people (person_id);

    alter table people
      add column pin_hash text,
      add column pin_set_at timestamptz,
      add column pin_set_by uuid references people,
      add constraint a_pin_says_when_and_by_whom check ((pin_hash is null) = (pin_set_at is null) and (pin_hash is null) = (pin_set_by is null));
  `);
}

export async function down(knex: Knex): Promise<void> {
  await knex.raw(`
    alter table people drop column pin_hash, drop column pin_set_at, drop column pin_set_by;
    drop table bench_people, benches;
  `);
}
