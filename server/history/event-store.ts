import { z } from 'zod';
import { unitEventSchema, type UnitEvent } from '../../shared/history/events.js';
import type { Db } from '../db.js';
import { ConflictError } from '../errors.js';

const rowSchema = z.object({
  id: z.string(),
  unit_id: z.string(),
  ordered_at: z.date(),
  at: z.date(),
  recorded_at: z.date(),
  person_id: z.string(),
  person_name: z.string(),
  person_role: z.string(),
  kind: z.string(),
  simulated: z.boolean(),
  run_id: z.string().nullable(),
  step_id: z.string().nullable(),
  body: z.record(z.string(), z.unknown()),
});

/** An event with its place in the history. */
export interface PlacedEvent {
  event: UnitEvent;
  orderedAt: Date;
  recordedAt: Date;
}

function placedEvent(row: z.infer<typeof rowSchema>): PlacedEvent {
  const event = unitEventSchema.parse({
    id: row.id,
    at: row.at.toISOString(),
    by: { id: row.person_id, name: row.person_name, role: row.person_role },
    simulated: row.simulated,
    ...(row.run_id === null ? {} : { runId: row.run_id }),
    ...(row.step_id === null ? {} : { stepId: row.step_id }),
    kind: row.kind,
    ...row.body,
  });
  return { event, orderedAt: row.ordered_at, recordedAt: row.recorded_at };
}

/** The histories of several units in one query, each oldest first. */
export async function historiesOf(db: Db, unitIds: readonly string[]): Promise<Map<string, PlacedEvent[]>> {
  const histories = new Map<string, PlacedEvent[]>(unitIds.map((id) => [id, []]));
  if (unitIds.length === 0) return histories;
  const rows = z.array(rowSchema).parse(
    await db('unit_events')
      .join('people', 'people.id', 'unit_events.person_id')
      .whereIn('unit_id', [...unitIds])
      .orderBy(['ordered_at', 'position'])
      .select('unit_events.*', 'people.name as person_name'),
  );
  for (const row of rows) histories.get(row.unit_id)?.push(placedEvent(row));
  return histories;
}

export async function historyOf(db: Db, unitId: string): Promise<PlacedEvent[]> {
  return (await historiesOf(db, [unitId])).get(unitId) ?? [];
}

/** Events may bring the ids that their benches gave them: one that is on the books already is a conflict. */
export async function insertEvents(
  db: Db,
  unitId: string,
  events: readonly Pick<PlacedEvent, 'event' | 'orderedAt'>[],
  recordedAt: Date,
): Promise<void> {
  const rows = events.map(({ event: { id, at, by, simulated, runId, stepId, kind, ...body }, orderedAt }) => ({
    id,
    unit_id: unitId,
    ordered_at: orderedAt,
    at,
    recorded_at: recordedAt,
    person_id: by.id,
    person_role: by.role,
    kind,
    simulated,
    run_id: runId,
    step_id: stepId,
    body: JSON.stringify(body),
  }));
  if (rows.length === 0) return;
  const inserted: unknown[] = await db('unit_events').insert(rows).onConflict('id').ignore().returning('id');
  if (inserted.length < rows.length)
    throw new ConflictError(
      'It is stored already, by this id.',
      'Send it again under the key it was first sent with, or give new work a new id.',
    );
}
