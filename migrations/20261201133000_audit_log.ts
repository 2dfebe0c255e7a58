import type { Knex } from 'knex';

// What changed, by whom, when, before and after. Names are copied, and nothing refers to other tables: the log says what was, and stays.
export async function up(knex: Knex): Promise<void> {
  await knex.raw(`
    create table audit_log (
      position bigint generated always as identity primary key,
      at timestamptz not null,
      -- Null: nobody was signed in (a failed sign-in, the first admin's link).
      who_id uuid,
      who_name text,
      who_role text,
      what text not null,
      subject_kind text not null,
      subject_id text not null,
      subject_name text not null,
      before jsonb,
      after jsonb,
      check ((who_id is null) = (who_name is null) and (who_id is null) = (who_role is null))
    );
    create index audit_log_of_person on audit_log (who_id, position);
    create index audit_log_of_what on audit_log (what, position);
    create index audit_log_of_subject on audit_log (subject_kind, subject_id, position);
    create index audit_log_of_time on audit_log (at, position);

    create function audit_log_is_append_only() returns trigger language plpgsql as $$
    begin
      raise exception 'audit_log is append-only: % is refused', tg_op using errcode = 'restrict_violation';
    end $$;
    create trigger audit_log_append_only before update or delete or truncate on audit_log
      for each statement execute function audit_log_is_append_only();
  `);
}

export async function down(knex: Knex): Promise<void> {
  await knex.raw(`
    drop table audit_log;
    drop function audit_log_is_append_only();
  `);
}
