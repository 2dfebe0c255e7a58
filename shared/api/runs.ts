import { z } from 'zod';
import { personRefSchema } from '../history/events.js';
import { faceSchema } from '../lamps/face.js';
import { decodeAnswerSchema } from '../decode/answer.js';
import { clockJumpSchema, runDamageSchema, runLogSchema, runPersonSchema, stepResultSchema } from '../script/run-log.js';
import { verdictSchema } from '../verdict.js';

export const newRunSchema = runLogSchema;
export const runStoredSchema = z.strictObject({ id: z.string(), verdict: verdictSchema });

/** A capture in a bench log is shown by its answer; its file is a page of its own. */
export const runPageSchema = z.strictObject({
  id: z.string(),
  unit: z.strictObject({ number: z.number().int(), maker: z.string(), model: z.string() }),
  script: runLogSchema.shape.script,
  rig: runLogSchema.shape.rig,
  by: personRefSchema,
  startedAt: z.string(),
  endedAt: z.string(),
  interrupted: z.boolean(),
  verdict: verdictSchema,
  /** Who began, resumed, took over, parked or abandoned it. Empty for runs of before there were hand-overs. */
  people: z.array(runPersonSchema),
  sheetEdition: z.number().int().optional(),
  clockJumps: z.array(clockJumpSchema).optional(),
  damages: z.array(runDamageSchema).optional(),
  /** Capture files are left out (`file` is empty). */
  steps: z.array(stepResultSchema),
  answers: z.record(z.string(), decodeAnswerSchema),
  faces: z.record(z.string(), faceSchema),
});
export type RunPage = z.infer<typeof runPageSchema>;
