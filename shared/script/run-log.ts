import { z } from 'zod';
import { calibrationBodySchema, inspectionBodySchema, readingBodySchema, repairBodySchema } from '../history/events.js';
import { verdictSchema } from '../verdict.js';

const resultBase = {
  stepId: z.string(),
  title: z.string(),
  startedAt: z.iso.datetime({ offset: true }),
  endedAt: z.iso.datetime({ offset: true }),
};

/** What one step of a bench run came to. Only judged kinds carry a verdict. A skipped step is `not done`. */
export const stepResultSchema = z.discriminatedUnion('kind', [
  z.strictObject({ ...resultBase, kind: z.literal('caution'), answer: z.enum(['yes', 'no']) }),
  z.strictObject({ ...resultBase, kind: z.literal('instruct'), answer: z.enum(['done', 'not done']) }),
  z.strictObject({ ...resultBase, kind: z.literal('inspect'), inspection: inspectionBodySchema }),
  z.strictObject({ ...resultBase, kind: z.literal('measure'), reading: readingBodySchema }),
  z.strictObject({
    ...resultBase,
    kind: z.literal('capture'),
    captureId: z.string(),
    file: z.string(),
    fromFile: z.boolean().default(false),
  }),
  z.strictObject({
    ...resultBase,
    kind: z.literal('expect'),
    captureId: z.string(),
    expected: z.string(),
    seen: z.string(),
    verdict: verdictSchema,
  }),
  z.strictObject({
    ...resultBase,
    kind: z.literal('watch'),
    captureId: z.string(),
    file: z.string(),
    calibration: z.boolean(),
    watched: calibrationBodySchema,
  }),
  z.strictObject({ ...resultBase, kind: z.literal('repair'), repair: repairBodySchema }),
  z.strictObject({ ...resultBase, kind: z.literal('clear'), procedure: z.string() }),
  z.strictObject({ ...resultBase, kind: z.literal('note'), text: z.string().max(5000) }),
  /** Not done: skipped, stopped before it, or kept from it by a safety gate. */
  z.strictObject({ ...resultBase, kind: z.literal('skipped'), stepKind: z.string(), judged: z.boolean(), reason: z.string() }),
]);
export type StepResult = z.infer<typeof stepResultSchema>;

/** What a bench run recorded, as one message from the bench to the server. */
export const runLogSchema = z.strictObject({
  id: z.uuid(),
  script: z.strictObject({ name: z.string(), title: z.string(), prove: z.boolean(), text: z.string().max(200_000) }),
  rig: z.strictObject({ name: z.string(), simulated: z.boolean() }),
  startedAt: z.iso.datetime({ offset: true }),
  endedAt: z.iso.datetime({ offset: true }),
  /** Stopped before its last step. */
  interrupted: z.boolean(),
  steps: z.array(stepResultSchema).max(500),
});
export type RunLog = z.infer<typeof runLogSchema>;
