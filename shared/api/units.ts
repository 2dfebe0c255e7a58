import { z } from 'zod';
import { slugSchema } from '../sheet/schema.js';
import { stageSchema } from '../readiness/stage.js';
import { readinessSchema } from '../readiness/readiness.js';
import { gateStateSchema } from '../readiness/gates.js';
import { unitEventSchema, personRefSchema } from '../history/events.js';
import { faceSchema } from '../lamps/face.js';
import { verdictSchema } from '../verdict.js';

/** Kinds of appliance. Those that hold gas, refrigerant or a microwave's charge are a licensed person's work (gate 11). */
export const applianceSchema = z.enum(['washing machine', 'dryer', 'dishwasher', 'oven', 'gas hob', 'fridge', 'microwave oven', 'other']);
export const LICENSED_ONLY: readonly Appliance[] = ['gas hob', 'fridge', 'microwave oven'];
export type Appliance = z.infer<typeof applianceSchema>;

const plateNumber = (what: string, most: number) =>
  z
    .number({ error: `type ${what} as a number` })
    .positive(`${what} must be above 0`)
    .max(most, `${what} is at most ${most}`)
    .optional();

/** The rating plate, as the plate on the machine has it. */
export const ratingPlateSchema = z.strictObject({
  maker: z.string().min(1, 'type the maker as the plate has it').max(100),
  model: z.string().min(1, 'type the model as the plate has it').max(100),
  serial: z.string().max(100).optional(),
  plateUnreadable: z.boolean().default(false),
  protectionClass: z.enum(['I', 'II', 'III']),
  volts: plateNumber('volts', 1000),
  hertz: plateNumber('hertz', 400),
  watts: plateNumber('watts', 100_000),
  amperes: plateNumber('amperes', 1000),
  massKg: plateNumber('the mass', 1000),
});
export type RatingPlate = z.infer<typeof ratingPlateSchema>;

export const newUnitSchema = z.strictObject({
  appliance: applianceSchema,
  plate: ratingPlateSchema,
  family: slugSchema.optional(),
  complaint: z.string().min(1, 'say what the machine is said to do').max(2000),
  source: z.string().max(200).optional(),
  costMinor: z.number().int().nonnegative().max(100_000_000).default(0),
  /** Needed when the serial number is on the books already. */
  sameSerialReason: z.enum(['bought back', 'plate unreadable', 'other']).optional(),
});
export type NewUnit = z.infer<typeof newUnitSchema>;

/** The control family of a unit that came in without one. */
export const giveFamilySchema = z.strictObject({ family: slugSchema });

/** The tag a unit carries, if it ever had one. */
export const tagStateSchema = z.strictObject({ number: z.string(), standing: z.enum(['stands', 'withdrawn']), signedOffAt: z.string() });

export const unitSchema = z.strictObject({
  id: z.string(),
  number: z.number().int().positive(),
  appliance: applianceSchema,
  plate: ratingPlateSchema,
  family: z.string().optional(),
  complaint: z.string(),
  source: z.string().optional(),
  costMinor: z.number().int(),
  licensedOnly: z.boolean(),
  takenInAt: z.string(),
  takenInBy: personRefSchema,
  sameSerial: z.strictObject({ reason: z.string(), units: z.array(z.number().int()) }).optional(),
});
export type Unit = z.infer<typeof unitSchema>;

/** A row of the units table: what stands at arm's length. */
export const unitRowSchema = unitSchema.extend({
  stage: stageSchema,
  rulesMet: z.number().int(),
  rulesTotal: z.number().int(),
  tag: tagStateSchema.optional(),
  /** The last capture since intake or return: its codes, `none` shown, or unreadable. */
  lamps: z.strictObject({
    state: z.enum(['not captured', 'codes', 'no code', 'unreadable']),
    codes: z.array(z.strictObject({ code: z.string(), face: faceSchema.optional() })),
  }),
  waitsFor: z.string(),
  lastEventAt: z.string(),
});
export type UnitRow = z.infer<typeof unitRowSchema>;

/** The unit's page: everything the terminal and the browser need to show or to decide. */
export const unitPageSchema = z.strictObject({
  unit: unitSchema,
  stage: stageSchema,
  readiness: readinessSchema,
  energising: gateStateSchema,
  tag: tagStateSchema.optional(),
  runs: z.array(
    z.strictObject({
      id: z.string(),
      script: z.string(),
      prove: z.boolean(),
      startedAt: z.string(),
      endedAt: z.string(),
      verdict: verdictSchema,
      steps: z.number().int(),
      by: personRefSchema,
    }),
  ),
  /** Oldest first. */
  events: z.array(unitEventSchema),
  /** A lamp face for each code in the captures, by code. */
  faces: z.record(z.string(), faceSchema),
});
export type UnitPage = z.infer<typeof unitPageSchema>;
export const overrideSchema = z.strictObject({
  gate: z.literal('dead tests'),
  reason: z.string().trim().min(10, 'say why, in at least 10 characters').max(2000),
});
