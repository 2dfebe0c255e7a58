import { z } from 'zod';
import { decodeAnswerSchema } from '../decode/answer.js';
import { judgementSchema } from '../measure/judge.js';
import { roleSchema } from '../api/roles.js';
import { deadTestSchema, slugSchema } from '../sheet/schema.js';
import { verdictSchema } from '../verdict.js';

/** Who did it, by the name the log shows. */
export const personRefSchema = z.strictObject({ id: z.string(), name: z.string(), role: roleSchema });
export type PersonRef = z.infer<typeof personRefSchema>;

/** A measured value with what it was judged by. `accuracy` and `resolution` as the meter's data sheet prints them (contract, section 4). */
export const readingBodySchema = z.strictObject({
  checkId: slugSchema,
  title: z.string(),
  condition: z.enum(['dead', 'energised']),
  deadTest: deadTestSchema.optional(),
  source: z.enum(['meter', 'typed']),
  instrument: z.strictObject({ id: z.string(), identification: z.string().optional() }).optional(),
  accuracy: z.string(),
  resolution: z.number().positive(),
  judgement: judgementSchema,
  /** A test that puts voltage on the machine, and no discharge is written down after it: as a pass it does not count (gate 2). */
  undischarged: z.literal(true).optional(),
});
export type ReadingBody = z.infer<typeof readingBodySchema>;

export const inspectionBodySchema = z.strictObject({
  checkId: slugSchema.optional(),
  title: z.string(),
  deadTest: deadTestSchema.optional(),
  verdict: verdictSchema,
  note: z.string().optional(),
});
export type InspectionBody = z.infer<typeof inspectionBodySchema>;

export const captureBodySchema = z.strictObject({
  captureId: z.string(),
  source: z.enum(['probe', 'keys', 'clip', 'simulated']),
  capturedAt: z.iso.datetime({ offset: true }),
  /** Taken from a file on disk: counts only if its header names this unit. */
  fromFile: z.boolean(),
  headerUnit: z.string().optional(),
  family: z.string(),
  sheetEdition: z.number().int(),
  answer: decodeAnswerSchema,
});
export type CaptureBody = z.infer<typeof captureBodySchema>;

export const partSourceSchema = z.discriminatedUnion('kind', [
  z.strictObject({ kind: z.literal('new') }),
  z.strictObject({ kind: z.literal('used'), fromUnit: z.number().int().positive() }),
  z.strictObject({ kind: z.literal('none') }),
]);
export const repairBodySchema = z.strictObject({
  /** The part that was changed, or what was done when no part was (source `none`). */
  part: z.string().min(1, 'say what was mended').max(200),
  partSource: partSourceSchema,
  minutes: z.number().int().nonnegative().max(10_000),
  /** What the part cost, in minor units of the shop's currency. */
  costMinor: z.number().int().nonnegative().max(100_000_000),
  note: z.string().max(2000).optional(),
});
export type RepairBody = z.infer<typeof repairBodySchema>;

export const calibrationBodySchema = z.strictObject({
  seconds: z.number().nonnegative(),
  verdict: verdictSchema,
  reason: z.string(),
  captureId: z.string().optional(),
  /** What the capture's header says of itself (gate 6); absent before the server has read it. */
  capturedAt: z.iso.datetime({ offset: true }).optional(),
  headerUnit: z.string().optional(),
});
export type CalibrationBody = z.infer<typeof calibrationBodySchema>;

const eventBase = {
  id: z.string(),
  /** When it happened, by the clock of whoever recorded it. */
  at: z.iso.datetime({ offset: true }),
  by: personRefSchema,
  /** Came off a simulated rig: counts only in the demo shop (gate 6). */
  simulated: z.boolean(),
  runId: z.string().optional(),
  stepId: z.string().optional(),
};

/** Everything that happens to a unit. The stage, the safety gates and readiness are functions of this list and of nothing else. */
export const unitEventSchema = z.discriminatedUnion('kind', [
  z.strictObject({ ...eventBase, kind: z.literal('intake'), complaint: z.string() }),
  z.strictObject({ ...eventBase, kind: z.literal('returned'), complaint: z.string() }),
  z.strictObject({ ...eventBase, kind: z.literal('sold') }),
  z.strictObject({ ...eventBase, kind: z.literal('inspection'), inspection: inspectionBodySchema }),
  z.strictObject({ ...eventBase, kind: z.literal('reading'), reading: readingBodySchema }),
  z.strictObject({ ...eventBase, kind: z.literal('capture'), capture: captureBodySchema }),
  z.strictObject({ ...eventBase, kind: z.literal('run began'), script: z.string(), prove: z.boolean() }),
  z.strictObject({
    ...eventBase,
    kind: z.literal('run ended'),
    script: z.string(),
    prove: z.boolean(),
    verdict: verdictSchema,
    steps: z.number().int(),
    /** Everybody who had a hand in it, where it was more than one. */
    people: z.array(personRefSchema).optional(),
  }),
  z.strictObject({ ...eventBase, kind: z.literal('repair'), repair: repairBodySchema }),
  /** A part was taken out for another unit: the machine is opened again as by a repair. */
  z.strictObject({ ...eventBase, kind: z.literal('part removed'), part: z.string(), toUnit: z.number().int().positive() }),
  z.strictObject({ ...eventBase, kind: z.literal('calibration'), calibration: calibrationBodySchema }),
  z.strictObject({ ...eventBase, kind: z.literal('codes cleared'), procedure: z.string() }),
  z.strictObject({ ...eventBase, kind: z.literal('note'), text: z.string() }),
  z.strictObject({ ...eventBase, kind: z.literal('override'), gate: z.literal('dead tests'), reason: z.string() }),
  z.strictObject({ ...eventBase, kind: z.literal('sign-off'), tag: z.string(), rulesMet: z.number().int(), fourEyes: z.boolean() }),
  z.strictObject({ ...eventBase, kind: z.literal('tag withdrawn'), tag: z.string(), reason: z.string() }),
]);
export type UnitEvent = z.infer<typeof unitEventSchema>;
export type UnitEventOf<K extends UnitEvent['kind']> = Extract<UnitEvent, { kind: K }>;
