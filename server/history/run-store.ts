import { z } from 'zod';
import { roleSchema } from '../../shared/api/roles.js';
import type { UnitPage } from '../../shared/api/units.js';
import type { PersonRef } from '../../shared/history/events.js';
import {
  clockJumpSchema,
  runDamageSchema,
  runLogSchema,
  runPersonSchema,
  stepResultSchema,
  type RunLog,
} from '../../shared/script/run-log.js';
import { verdictSchema, type Verdict } from '../../shared/verdict.js';
import type { Db } from '../db.js';

const headShape = {
  id: z.string(),
  unit_id: z.string(),
  person_id: z.string(),
  person_name: z.string(),
  person_role: roleSchema,
  started_at: z.date(),
  ended_at: z.date(),
  verdict: verdictSchema,
};
const byOf = (row: { person_id: string; person_name: string; person_role: PersonRef['role'] }): PersonRef => ({
  id: row.person_id,
  name: row.person_name,
  role: row.person_role,
});

const listedSchema = z
  .object({ ...headShape, script_name: z.string(), prove: z.boolean(), steps: z.number() })
  .transform((row): UnitPage['runs'][number] => ({
    id: row.id,
    script: row.script_name,
    prove: row.prove,
    startedAt: row.started_at.toISOString(),
    endedAt: row.ended_at.toISOString(),
    verdict: row.verdict,
    steps: row.steps,
    by: byOf(row),
  }));

/** The runs of a unit, oldest first. */
export async function runsOf(db: Db, unitId: string): Promise<UnitPage['runs']> {
  const rows: unknown = await db('runs')
    .join('people', 'people.id', 'runs.person_id')
    .where({ unit_id: unitId })
    .orderBy(['recorded_at', 'runs.id'])
    .select('runs.id', 'unit_id', 'person_id', 'people.name as person_name', 'person_role', 'started_at', 'ended_at', 'verdict')
    .select(db.raw("script ->> 'name' as script_name, (script ->> 'prove')::boolean as prove, jsonb_array_length(steps) as steps"));
  return z.array(listedSchema).parse(rows);
}

const storedSchema = z
  .object({
    ...headShape,
    unit_number: z.number(),
    script: runLogSchema.shape.script,
    rig: runLogSchema.shape.rig,
    interrupted: z.boolean(),
    people: z.array(runPersonSchema),
    sheet_edition: z.number().nullable(),
    clock_jumps: z.array(clockJumpSchema).nullable(),
    damages: z.array(runDamageSchema).nullable(),
    steps: z.array(stepResultSchema),
  })
  .transform((row) => ({
    id: row.id,
    unitNumber: row.unit_number,
    by: byOf(row),
    script: row.script,
    rig: row.rig,
    startedAt: row.started_at.toISOString(),
    endedAt: row.ended_at.toISOString(),
    interrupted: row.interrupted,
    verdict: row.verdict,
    people: row.people,
    ...(row.sheet_edition === null ? {} : { sheetEdition: row.sheet_edition }),
    ...(row.clock_jumps === null ? {} : { clockJumps: row.clock_jumps }),
    ...(row.damages === null ? {} : { damages: row.damages }),
    steps: row.steps,
  }));
type StoredRun = z.output<typeof storedSchema>;

export async function findRun(db: Db, id: string): Promise<StoredRun | undefined> {
  const row: unknown = await db('runs')
    .join('people', 'people.id', 'runs.person_id')
    .join('units', 'units.id', 'runs.unit_id')
    .where('runs.id', id)
    .first('runs.*', 'people.name as person_name', 'units.number as unit_number');
  return row === undefined ? undefined : storedSchema.parse(row);
}

interface NewRun {
  unitId: string;
  by: PersonRef;
  /** Without the capture files: those are rows of their own. */
  log: RunLog;
  verdict: Verdict;
  recordedAt: Date;
}

/** False where a run with this id is stored already. */
export async function insertRun(db: Db, { unitId, by, log, verdict, recordedAt }: NewRun): Promise<boolean> {
  const inserted: unknown[] = await db('runs')
    .insert({
      id: log.id,
      unit_id: unitId,
      person_id: by.id,
      person_role: by.role,
      script: JSON.stringify(log.script),
      rig: JSON.stringify(log.rig),
      started_at: log.startedAt,
      ended_at: log.endedAt,
      interrupted: log.interrupted,
      verdict,
      people: JSON.stringify(log.people),
      sheet_edition: log.sheetEdition ?? null,
      clock_jumps: log.clockJumps ? JSON.stringify(log.clockJumps) : null,
      damages: log.damages ? JSON.stringify(log.damages) : null,
      steps: JSON.stringify(log.steps),
      recorded_at: recordedAt,
    })
    .onConflict('id')
    .ignore()
    .returning('id');
  return inserted.length > 0;
}
