import type { Knex } from 'knex';

// Ids are made by the application (UUIDv7), times are timestamptz, measured values double precision, money whole minor units.
export async function up(knex: Knex): Promise<void> {
  await knex.raw(`
    create table shop (
      only_row boolean primary key default true check (only_row),
      name text not null,
      address text not null,
      phone text not null,
      currency text not null,
      demo boolean not null,
      four_eyes boolean not null,
      warranty_months integer not null
    );

    create table people (
      id uuid primary key,
      email text not null,
      email_key text not null unique,
      name text not null,
      role text not null check (role in ('technician', 'lead', 'sales', 'admin')),
      password_hash text not null,
      active boolean not null default true,
      created_at timestamptz not null
    );

    create table sessions (
      token_hash bytea primary key,
      person_id uuid not null references people,
      created_at timestamptz not null,
      expires_at timestamptz not null,
      revoked_at timestamptz
    );
    create index sessions_of_person on sessions (person_id);

    create table first_admin_links (
      token_hash bytea primary key,
      created_at timestamptz not null,
      expires_at timestamptz not null
    );

    create table sheets (
      id uuid primary key,
      family text not null,
      edition integer not null,
      content jsonb not null,
      text text not null,
      added_by uuid not null references people,
      added_at timestamptz not null,
      unique (family, edition)
    );

    create sequence unit_numbers as integer;
    create table units (
      id uuid primary key,
      number integer not null unique,
      appliance text not null,
      maker text not null,
      model text not null,
      serial text,
      serial_key text,
      plate_unreadable boolean not null,
      protection_class text not null,
      volts double precision,
      hertz double precision,
      watts double precision,
      amperes double precision,
      mass_kg double precision,
      family text,
      complaint text not null,
      source text,
      cost_minor integer not null,
      licensed_only boolean not null,
      taken_in_at timestamptz not null,
      taken_in_by uuid not null references people,
      taken_in_by_role text not null,
      same_serial_reason text,
      same_serial_units integer[],
      -- Worked out from the events whenever one is added, never typed in: for the list's filter.
      stage text not null
    );
    create index units_of_serial on units (serial_key) where serial_key is not null;
    create index units_of_stage on units (stage, number);

    create table runs (
      id uuid primary key,
      unit_id uuid not null references units,
      person_id uuid not null references people,
      person_role text not null,
      script jsonb not null,
      rig jsonb not null,
      started_at timestamptz not null,
      ended_at timestamptz not null,
      interrupted boolean not null,
      verdict text not null,
      steps jsonb not null,
      recorded_at timestamptz not null
    );
    create index runs_of_unit on runs (unit_id);

    create table captures (
      id uuid primary key,
      unit_id uuid not null references units,
      run_id uuid references runs,
      person_id uuid not null references people,
      person_role text not null,
      at timestamptz not null,
      simulated boolean not null,
      body jsonb not null,
      codes text[] not null,
      file text not null,
      recorded_at timestamptz not null
    );
    create index captures_of_unit on captures (unit_id);
    create index captures_of_run on captures (run_id);
    create index captures_of_code on captures using gin (codes);

    create table unit_events (
      id uuid primary key,
      unit_id uuid not null references units,
      -- The order of the history: by its place in time, and within that as they were written down.
      ordered_at timestamptz not null,
      position bigint generated always as identity,
      at timestamptz not null,
      recorded_at timestamptz not null,
      person_id uuid not null references people,
      person_role text not null,
      kind text not null,
      simulated boolean not null,
      run_id uuid references runs,
      step_id text,
      body jsonb not null
    );
    create unique index unit_events_in_order on unit_events (unit_id, ordered_at, position);

    create table tags (
      number text primary key,
      unit_id uuid not null references units,
      running integer not null,
      content jsonb not null,
      jws text not null,
      look_up_word text not null,
      signed_off_at timestamptz not null,
      signed_off_by uuid not null references people,
      withdrawn_at timestamptz,
      withdrawn_reason text,
      unique (unit_id, running),
      check ((withdrawn_at is null) = (withdrawn_reason is null))
    );
    create unique index one_standing_tag_a_unit on tags (unit_id) where withdrawn_at is null;

    create table idempotency_keys (
      person_id uuid not null references people,
      key text not null,
      request_hash bytea not null,
      status integer,
      answer text,
      created_at timestamptz not null,
      primary key (person_id, key)
    );
    create index idempotency_keys_by_age on idempotency_keys (created_at);
  `);
}

export async function down(knex: Knex): Promise<void> {
  await knex.raw(`
    drop table idempotency_keys, tags, unit_events, captures, runs, units, sheets, first_admin_links, sessions, people, shop;
    drop sequence unit_numbers;
  `);
}
