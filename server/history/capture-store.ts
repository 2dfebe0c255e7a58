import { z } from 'zod';
import { roleSchema } from '../../shared/api/roles.js';
import { captureBodySchema, type CaptureBody, type PersonRef } from '../../shared/history/events.js';
import type { Db } from '../db.js';

const rowSchema = z
  .object({
    id: z.string(),
    unit_number: z.number(),
    run_id: z.string().nullable(),
    person_id: z.string(),
    person_name: z.string(),
    person_role: roleSchema,
    at: z.date(),
    simulated: z.boolean(),
    body: captureBodySchema,
    file: z.string(),
  })
  .transform((row) => ({
    id: row.id,
    unitNumber: row.unit_number,
    runId: row.run_id ?? undefined,
    by: { id: row.person_id, name: row.person_name, role: row.person_role },
    at: row.at.toISOString(),
    simulated: row.simulated,
    body: row.body,
    file: row.file,
  }));
type StoredCapture = z.output<typeof rowSchema>;

const captureRows = (db: Db) =>
  db('captures').join('people', 'people.id', 'captures.person_id').join('units', 'units.id', 'captures.unit_id');

export async function findCapture(db: Db, id: string): Promise<StoredCapture | undefined> {
  const row: unknown = await captureRows(db)
    .where('captures.id', id)
    .first('captures.*', 'people.name as person_name', 'units.number as unit_number');
  return row === undefined ? undefined : rowSchema.parse(row);
}

/** What a run's captures decoded to, without their files. */
export async function captureBodiesOfRun(db: Db, runId: string): Promise<CaptureBody[]> {
  return z.array(captureBodySchema).parse(await captureRows(db).where('captures.run_id', runId).pluck('captures.body'));
}

export interface NewCapture {
  id: string;
  unitId: string;
  runId?: string;
  by: PersonRef;
  at: string;
  simulated: boolean;
  body: CaptureBody;
  file: string;
  recordedAt: Date;
}

/** False where a capture with this id is stored already. */
export async function insertCapture(db: Db, capture: NewCapture): Promise<boolean> {
  const inserted: unknown[] = await db('captures')
    .insert({
      id: capture.id,
      unit_id: capture.unitId,
      run_id: capture.runId,
      person_id: capture.by.id,
      person_role: capture.by.role,
      at: capture.at,
      simulated: capture.simulated,
      body: JSON.stringify(capture.body),
      codes: [...new Set(capture.body.answer.codes.map(({ code }) => code.toUpperCase()))],
      file: capture.file,
      recorded_at: capture.recordedAt,
    })
    .onConflict('id')
    .ignore()
    .returning('id');
  return inserted.length > 0;
}
