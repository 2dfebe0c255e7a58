import { z } from 'zod';
import { isPassing, liveEventSchema, type LiveEvent, type LiveWorkEvent, type NewLive } from '../../../shared/api/live.js';
import { LOCK } from '../../advisory-locks.js';
import type { Db } from '../../db.js';

export const LIVE_CHANNEL = 'refettle_live';
export const SIGN_OUTS_CHANNEL = 'refettle_sign_outs';

/** A page that comes back within this time goes on where it was; one that comes later starts anew. */
const RESUMED_WITHIN = "interval '5 minutes'";
/** Twice the longest bench run that anybody would watch from its beginning. */
const KEPT = "interval '1 day'";
/** A bench that was not heard of for so long is no longer shown to who comes. */
const SHOWN_AFTER_LAST_SIGN = "interval '15 minutes'";
/** Work that has ended is shown for a while to who comes. */
const SHOWN_AFTER_END = "interval '10 minutes'";
/** Who comes sees the lanes of the last minute. */
const LANES_SHOWN = "interval '60 seconds'";

/** An event with its place in the order. */
export interface PlacedLive {
  id: number;
  event: LiveEvent;
}

const rowSchema = z.object({ id: z.number(), body: z.unknown() });

/** Events as they are kept; what this server can't read (a newer one beside it wrote it) is left out, and spoils nothing else. */
function placed(rows: unknown): PlacedLive[] {
  return z
    .array(rowSchema)
    .parse(rows)
    .flatMap(({ id, body }) => {
      const event = liveEventSchema.safeParse(body);
      return event.success ? [{ id, event: event.data }] : [];
    });
}

/**
 * Keeps a part that a bench told, and wakes every server. False: it was told before.
 * Its commit does not wait for the disk (decision 35): what a power cut takes of it was seen by whoever watched, and is no evidence.
 */
export async function insertLive(trx: Db, { sitting, part }: Pick<NewLive, 'sitting' | 'part'>, event: LiveWorkEvent): Promise<boolean> {
  const { unit, work, messages } = event;
  // One round trip, since others wait for the lock. The id is drawn for a row of "held", so after the lock is held.
  const { rows } = await trx.raw<{ rows: unknown[] }>(
    `with held as materialized (select set_config('synchronous_commit', 'off', true), pg_advisory_xact_lock(:lock)),
       told as (
         insert into live_events (key, unit_number, work, begins, ends, passing, body)
         select :key, cast(:unit as integer), cast(:work as uuid), cast(:begins as boolean), cast(:ends as boolean),
           cast(:passing as boolean), cast(:body as jsonb) from held
         on conflict (key) do nothing returning id
       )
     select id, pg_notify(:channel, '') from told`,
    {
      lock: LOCK.live,
      key: `${sitting} ${String(part)}`,
      unit,
      work,
      begins: messages.some(({ kind }) => kind === 'began'),
      // By the last word: a run that was parked and goes on within one part is going on.
      ends: messages.findLast(({ kind }) => kind === 'began' || kind === 'ended')?.kind === 'ended',
      passing: messages.every(isPassing),
      body: JSON.stringify(event),
      channel: LIVE_CHANNEL,
    },
  );
  return rows.length > 0;
}

/** The id of the newest event; 0 where there is none. */
export async function newestLiveId(db: Db): Promise<number> {
  const row: unknown = await db('live_events').max('id as id').first();
  return z.object({ id: z.number().nullable() }).parse(row).id ?? 0;
}

/** Whether everything after this event is still there. */
export async function canResumeAfter(db: Db, id: number): Promise<boolean> {
  const row: unknown = await db('live_events').where({ id }).whereRaw(`recorded_at > clock_timestamp() - ${RESUMED_WITHIN}`).first('id');
  return row !== undefined;
}

/** What came after one event, in order: `upTo` is the last of it, read or not, `more` that there is more. */
export async function liveAfter(db: Db, after: number, limit: number): Promise<{ events: PlacedLive[]; upTo: number; more: boolean }> {
  const rows: { id: number }[] = await db('live_events').where('id', '>', after).orderBy('id').limit(limit).select('id', 'body');
  return { events: placed(rows), upTo: rows.at(-1)?.id ?? after, more: rows.length === limit };
}

/** Whether ids begin anew somewhere before this one: a backup was put back, or the database lost its last moments. */
export async function idsWentBack(db: Db, newest: number): Promise<boolean> {
  const { rows } = await db.raw<{ rows: { last: number | null }[] }>(
    `select pg_sequence_last_value(cast(pg_get_serial_sequence('live_events', 'id') as regclass)) as last`,
  );
  return (rows[0]?.last ?? 0) < newest;
}

/** The work that goes on or has just ended, each from where it last began; of its lanes only the end. */
export async function liveWork(db: Db, upTo: number, unit: number | undefined): Promise<PlacedLive[]> {
  const { rows } = await db.raw<{ rows: unknown }>(
    `with heard as (
       select work, max(id) filter (where begins) as first_id, max(id) filter (where ends) as end_id, max(recorded_at) as at
       from live_events
       where work is not null and id <= :upTo ${unit === undefined ? '' : 'and unit_number = :unit'}
       group by work
     )
     select id, body from live_events join heard using (work)
     where id >= first_id and id <= :upTo
       and heard.at > clock_timestamp() - case when end_id >= first_id then ${SHOWN_AFTER_END} else ${SHOWN_AFTER_LAST_SIGN} end
       and (not passing or recorded_at > clock_timestamp() - ${LANES_SHOWN})
     order by id`,
    { upTo, ...(unit === undefined ? {} : { unit }) },
  );
  return placed(rows);
}

/** Lanes have passed after minutes, the rest after a day. */
export async function deleteOldLive(db: Db): Promise<void> {
  await db('live_events')
    .whereRaw(`recorded_at < clock_timestamp() - ${RESUMED_WITHIN} and passing`)
    .orWhereRaw(`recorded_at < clock_timestamp() - ${KEPT}`)
    .delete();
}
