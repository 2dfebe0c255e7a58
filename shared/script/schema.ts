import { z } from 'zod';
import { slugSchema } from '../sheet/schema.js';

const stepBase = { id: slugSchema, title: z.string().min(1) };

/** The lamps a watch step waits for: each lamp on or off; lamps that are not named may do anything. */
const lampStatesSchema = z.record(slugSchema, z.enum(['on', 'off']));

/**
 * The step kinds of a bench script. A new kind is one line here, one file in `cli/bench/steps/`,
 * and a line in `shared/history/settle-run.ts` if it leaves an event.
 */
export const stepSchema = z.discriminatedUnion('kind', [
  /** Waits for a person's yes or no; it has no default, and `no` goes to the safe state. */
  z.strictObject({ ...stepBase, kind: z.literal('caution'), text: z.string().min(1) }),
  /** Tells what to do, or walks through a procedure of the sheet; waits for the word that it is done. */
  z.strictObject({
    ...stepBase,
    kind: z.literal('instruct'),
    text: z.string().optional(),
    procedure: slugSchema.optional(),
    discharge: z.boolean().optional(),
  }),
  /** A check of the sheet that is looked at, or a question of the script's own. */
  z.strictObject({ ...stepBase, kind: z.literal('inspect'), check: slugSchema.optional(), question: z.string().optional() }),
  /** A check of the sheet that is measured. */
  z.strictObject({ ...stepBase, kind: z.literal('measure'), check: slugSchema }),
  /** Records the lamps. */
  z.strictObject({ ...stepBase, kind: z.literal('capture'), seconds: z.number().positive().max(3600) }),
  /** What an earlier capture must have shown: no code (gate 4), any code, or one code. */
  z.strictObject({ ...stepBase, kind: z.literal('expect'), of: slugSchema, code: z.string().min(1) }),
  /** Waits for a lamp pattern within a time: begins with one, ends with another. `calibration`: the control's own calibration cycle of the sheet. */
  z.strictObject({
    ...stepBase,
    kind: z.literal('watch'),
    calibration: z.literal(true).optional(),
    begins: lampStatesSchema.optional(),
    ends: lampStatesSchema.optional(),
    withinS: z.tuple([z.number().nonnegative(), z.number().positive()]).optional(),
  }),
  /** What was mended: part, where it came from, minutes, cost are asked for. */
  z.strictObject({ ...stepBase, kind: z.literal('repair'), part: z.string().optional(), optional: z.boolean().optional() }),
  /** Clears the stored codes by the sheet's procedure. */
  z.strictObject({ ...stepBase, kind: z.literal('clear') }),
  /** Asks for a line of text. */
  z.strictObject({ ...stepBase, kind: z.literal('note') }),
]);
export type Step = z.infer<typeof stepSchema>;
export type StepKind = Step['kind'];
export type StepOf<K extends StepKind> = Extract<Step, { kind: K }>;

export const scriptSchema = z.strictObject({
  format: z.literal('refettle.script'),
  version: z.literal(1),
  name: slugSchema,
  title: z.string().min(1),
  family: slugSchema,
  /** A proof run: begins the stage `proving`. */
  prove: z.boolean().default(false),
  steps: z.array(stepSchema).min(1),
});
export type Script = z.infer<typeof scriptSchema>;

/** In an expect step: what stands for "no code, proved", and for "any code". */
export const NO_CODE = 'none';
export const ANY_CODE = 'any';
