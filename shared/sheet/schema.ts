import { z } from 'zod';

/** A name that is also a key: lamps, families, checks, parts. */
export const slugSchema = z.string().regex(/^[a-z0-9][a-z0-9-]*$/, 'use lower-case letters, digits and hyphens');

const bandSchema = z
  .tuple([z.number().nonnegative(), z.number().positive()])
  .refine(([least, most]) => least < most, 'the least of a band must be below its most');
export type Band = z.infer<typeof bandSchema>;

export const lampColourSchema = z.enum(['green', 'red', 'amber', 'white', 'blue']);
export const lampSchema = z.strictObject({ id: slugSchema, label: z.string().min(1), colour: lampColourSchema });
export type Lamp = z.infer<typeof lampSchema>;

export const readySchema = z.strictObject({ lamps: z.array(slugSchema).min(1), periodS: bandSchema });

export const weightedPhasesSchema = z.strictObject({
  kind: z.literal('weighted-phases'),
  selector: slugSchema,
  weights: z.record(slugSchema, z.number().int().positive()),
  maxDigit: z.number().int().nonnegative(),
  phaseS: bandSchema,
  code: z.string().min(1),
  letters: z.strictObject({ on: z.string(), off: z.string() }).optional(),
});
export const flashCountSchema = z.strictObject({
  kind: z.literal('flash-count'),
  lamp: slugSchema,
  digits: z.number().int().positive(),
  maxDigit: z.number().int().positive(),
  flashS: bandSchema,
  gapS: bandSchema,
  pauseS: bandSchema,
  restS: bandSchema,
  code: z.string().min(1),
});
const patternStateSchema = z.enum(['off', 'on', 'slow', 'fast']);
export const steadyPatternSchema = z.strictObject({
  kind: z.literal('steady-pattern'),
  rateHz: z.strictObject({ slow: bandSchema, fast: bandSchema }),
  holdS: z.number().positive(),
  patterns: z.array(z.strictObject({ code: z.string().min(1), lamps: z.record(slugSchema, patternStateSchema) })).min(1),
});
export const codingSchema = z.discriminatedUnion('kind', [weightedPhasesSchema, flashCountSchema, steadyPatternSchema]);
export type Coding = z.infer<typeof codingSchema>;
export type WeightedPhases = z.infer<typeof weightedPhasesSchema>;

export const faultSchema = z.strictObject({
  code: z.string().min(1),
  title: z.string().min(1),
  suspects: z.array(z.string().min(1)).optional(),
  first: z.string().optional(),
});

/** How the machine is brought into a state by hand; `withinS` when the gesture is timed. */
export const procedureSchema = z.strictObject({
  id: slugSchema,
  title: z.string().min(1),
  cautions: z.array(z.string().min(1)).default([]),
  steps: z.array(z.string().min(1)).min(1),
  withinS: z.number().positive().optional(),
  /** What the panel shows when it worked. */
  answeredBy: z.string().optional(),
});

/** The control's own calibration cycle, as its lamps and its clock show it. */
export const calibrationSchema = z.strictObject({
  procedure: slugSchema,
  durationS: bandSchema,
  /** The lamp that is lit while the lid is locked. */
  lockLamp: slugSchema,
  note: z.string().optional(),
});

/** Which of the dead tests a check is; they have an order (gate 1). */
export const deadTestSchema = z.enum(['visual', 'protective-conductor', 'insulation']);
export type DeadTest = z.infer<typeof deadTestSchema>;

const checkBase = {
  id: slugSchema,
  title: z.string().min(1),
  deadTest: deadTestSchema.optional(),
  /** Belongs to the electrical safety test after a repair. */
  safety: z.boolean().default(false),
  /** Must have passed before a sign-off. */
  required: z.boolean().default(true),
  /** Protection classes the check is for; all when absent. A class II machine has no protective conductor. */
  classes: z.array(z.enum(['I', 'II', 'III'])).optional(),
  part: z.string().optional(),
  cautions: z.array(z.string().min(1)).default([]),
  source: z.string().optional(),
};
export const measuredCheckSchema = z.strictObject({
  ...checkBase,
  kind: z.literal('measure'),
  /** dead: the machine is isolated; energised: mains or a test voltage is on the parts. */
  condition: z.enum(['dead', 'energised']),
  quantity: z.enum(['resistance', 'insulation resistance', 'voltage ac', 'voltage dc', 'current ac', 'capacitance', 'temperature']),
  unit: z.enum(['ohm', 'Mohm', 'V', 'mA', 'A', 'uF', 'degC']),
  low: z.number().optional(),
  high: z.number().optional(),
});
export const inspectedCheckSchema = z.strictObject({ ...checkBase, kind: z.literal('inspect'), question: z.string().min(1) });
export const checkSchema = z.discriminatedUnion('kind', [measuredCheckSchema, inspectedCheckSchema]);
export type Check = z.infer<typeof checkSchema>;
export type MeasuredCheck = z.infer<typeof measuredCheckSchema>;

export const sheetSchema = z.strictObject({
  format: z.literal('refettle.sheet'),
  version: z.literal(1),
  edition: z.number().int().positive(),
  family: slugSchema,
  title: z.string().optional(),
  appliance: z.string().optional(),
  lamps: z.array(lampSchema).min(1),
  ready: readySchema.optional(),
  coding: codingSchema,
  faults: z.array(faultSchema).default([]),
  procedures: z.array(procedureSchema).default([]),
  calibration: calibrationSchema.optional(),
  /** How long a capture without a code must last to prove that there is none. */
  noCodeS: z.number().positive().default(20),
  checks: z.array(checkSchema).default([]),
  parts: z.array(z.string().min(1)).default([]),
});
export type Sheet = z.infer<typeof sheetSchema>;
