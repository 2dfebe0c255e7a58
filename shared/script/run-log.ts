import { z } from 'zod';
import { BadInputError } from '../errors.js';
import {
  calibrationBodySchema,
  inspectionBodySchema,
  personRefSchema,
  readingBodySchema,
  repairBodySchema,
  type PersonRef,
} from '../history/events.js';
import { verdictSchema } from '../verdict.js';

const resultBase = {
  stepId: z.string(),
  title: z.string(),
  startedAt: z.iso.datetime({ offset: true }),
  endedAt: z.iso.datetime({ offset: true }),
  /** The id of the person who did it, one of the log's `people`; whoever began the run, where absent. */
  by: z.string().optional(),
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
  /** Lamps that were recorded before the step was broken off: kept, and the step is asked again. It stands before that step's own result. */
  z.strictObject({ ...resultBase, kind: z.literal('cut'), captureId: z.string(), file: z.string() }),
  /** Not done: skipped, stopped before it, or kept from it by a safety gate. */
  z.strictObject({ ...resultBase, kind: z.literal('skipped'), stepKind: z.string(), judged: z.boolean(), reason: z.string() }),
]);
export type StepResult = z.infer<typeof stepResultSchema>;

/** Whether a step's result carries a capture file. */
export const holdsFile = (result: StepResult): result is Extract<StepResult, { file: string }> =>
  result.kind === 'capture' || result.kind === 'watch' || result.kind === 'cut';

/** Somebody came to a run, or left it. Everybody who stands here had a hand in it (four eyes). */
export const runPersonSchema = z.strictObject({
  person: personRefSchema,
  at: z.iso.datetime({ offset: true }),
  how: z.enum(['began', 'resumed', 'took over', 'parked', 'abandoned']),
  reason: z.string().min(1).max(500).optional(),
  /** How many step results the log held by then: what came later came after it, whatever the clocks say. */
  steps: z.number().int().nonnegative().default(0),
});
export type RunPerson = z.infer<typeof runPersonSchema>;

/** The bench's clock was set while the run went on. The log's own times go on from the highest, so that they never run backwards. */
export const clockJumpSchema = z.strictObject({
  at: z.iso.datetime({ offset: true }),
  /** How far it was set: forward above 0, back below. */
  seconds: z.number(),
  steps: z.number().int().nonnegative(),
});
export type ClockJump = z.infer<typeof clockJumpSchema>;

/**
 * A line of the bench's journal that did not hold together. Nothing behind it was taken for done and its steps were asked again; what
 * stands whole behind it stays as evidence: it opens nothing, and a fail, a code or a repair among it counts.
 */
export const runDamageSchema = z.strictObject({
  line: z.number().int().positive(),
  reason: z.string().max(500),
  /** How many step results the log held before it. */
  steps: z.number().int().nonnegative(),
  found: z.array(stepResultSchema).max(500),
});
export type RunDamage = z.infer<typeof runDamageSchema>;

/** What a bench run recorded, as one message from the bench to the server. */
export const runLogSchema = z.strictObject({
  id: z.uuid(),
  script: z.strictObject({ name: z.string(), title: z.string(), prove: z.boolean(), text: z.string().max(200_000) }),
  rig: z.strictObject({ name: z.string(), simulated: z.boolean() }),
  startedAt: z.iso.datetime({ offset: true }),
  endedAt: z.iso.datetime({ offset: true }),
  /** Stopped before its last step. */
  interrupted: z.boolean(),
  /** Who began, resumed, took over, parked or abandoned it, in that order. Empty in logs of before there were hand-overs. */
  people: z.array(runPersonSchema).max(200).default([]),
  /** The edition of the service sheet that it was run by. */
  sheetEdition: z.number().int().positive().optional(),
  clockJumps: z.array(clockJumpSchema).max(200).optional(),
  damages: z.array(runDamageSchema).max(50).optional(),
  steps: z.array(stepResultSchema).max(500),
});
export type RunLog = z.infer<typeof runLogSchema>;

/** Whether the safe state lies between: the people of a log who came back to it after its beginning. */
export const isReturn = ({ how }: RunPerson): boolean => how === 'resumed' || how === 'took over';

/**
 * Who did a step, and everybody who had a hand in the run, whoever began it first.
 *
 * `began` is who the run is known to have been begun by. Refuses (BadInputError) a step by somebody the log does not name.
 *
 * @example peopleOf({ people: [], steps: [] }, wil).everybody // [wil]
 */
export function peopleOf(
  { people, steps }: Pick<RunLog, 'people' | 'steps'>,
  began: PersonRef,
): { everybody: PersonRef[]; doer: (by: string | undefined) => PersonRef } {
  const byId = new Map<string, PersonRef>([[began.id, began], ...people.map(({ person }) => [person.id, person] as const)]);
  const stranger = steps.find(({ by }) => by !== undefined && !byId.has(by));
  if (stranger) throw new BadInputError(`step '${stranger.stepId}' was done by somebody who does not stand among the people of the log`);
  return { everybody: [...byId.values()], doer: (by) => (by === undefined ? began : (byId.get(by) ?? began)) };
}
