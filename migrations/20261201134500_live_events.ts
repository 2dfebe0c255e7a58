import type { Knex } from 'knex';

// What benches tell while they work, and that something was written on a unit's books: read by the live pages, thrown away soon after.
// Ids are in the order of commits, so that "everything after id n" misses nothing: whoever inserts holds this lock until its commit.
export async function up(knex: Knex): Promise<void> {
  await knex.raw(`
    create table live_events (
      id bigint generated always as identity primary key,
      -- What is told twice is kept once.
      key text not null unique,
      unit_number integer not null,
      -- The bench run, capture or reading that it is about; none where a unit's books changed.
      work uuid,
      begins boolean not null default false,
      ends boolean not null default false,
      -- Of no use to who comes later: levels of lamps, signs of life.
      passing boolean not null default false,
      body jsonb not null,
      recorded_at timestamptz not null default clock_timestamp()
    );
    create index live_events_by_age on live_events (recorded_at);

    -- At the very end of a transaction (deferred), so that nobody waits for the lock while work is still being done.
    create function announce_unit_change() returns trigger language plpgsql as $$
    declare
      changed integer;
    begin
      if tg_table_name = 'units' then
        changed := new.number;
      else
        select number into changed from units where id = new.unit_id;
      end if;
      perform pg_advisory_xact_lock(727275);
      insert into live_events (key, unit_number, body)
        values (
          format('unit %s %s %s', changed, pg_current_xact_id(), extract(epoch from transaction_timestamp())),
          changed,
          jsonb_build_object('kind', 'unit changed', 'unit', changed)
        )
        on conflict (key) do nothing;
      perform pg_notify('refettle_live', '');
      return null;
    end
    $$;
    create constraint trigger unit_events_are_announced after insert on unit_events
      deferrable initially deferred for each row execute function announce_unit_change();
    create constraint trigger unit_changes_are_announced after update on units
      deferrable initially deferred for each row execute function announce_unit_change();

    -- Who was signed out must not go on listening.
    create function announce_sign_outs() returns trigger language plpgsql as $$
    begin
      perform pg_notify('refettle_sign_outs', '');
      return null;
    end
    $$;
    create trigger sign_outs_are_announced after update of revoked_at, expires_at or delete on sessions
      for each statement execute function announce_sign_outs();
    create trigger changes_of_people_are_announced after update of active, role on people
      for each statement execute function announce_sign_outs();
  `);
}

export async function down(knex: Knex): Promise<void> {
  await knex.raw(`
    drop trigger changes_of_people_are_announced on people;
    drop trigger sign_outs_are_announced on sessions;
    drop trigger unit_changes_are_announced on units;
    drop trigger unit_events_are_announced on unit_events;
    drop function announce_sign_outs;
    drop function announce_unit_change;
    drop table live_events;
  `);
}
