import { z } from 'zod';
import { parse as parseYaml } from 'yaml';
import { BadInputError } from '../../../shared/errors.js';
import { repairBodySchema } from '../../../shared/history/events.js';
import { measuredCheckSchema, slugSchema } from '../../../shared/sheet/schema.js';

const seconds = z.number().positive();

/** What the lamps show for a while. The last stretch of a plan goes on until the capture ends. */
const stretchSchema = z.discriminatedUnion('show', [
  /** The lamps of `panel.ready` blink together. */
  z.strictObject({ show: z.literal('ready'), seconds }),
  /** A code of the panel: the selector lit with lamps that add up to `on`, then dark with lamps that add up to `off`. */
  z.strictObject({
    show: z.literal('code'),
    on: z.number().int().nonnegative(),
    off: z.number().int().nonnegative(),
    repeats: z.number().int().positive(),
    next: z.boolean().default(false),
  }),
  /** These lamps steadily lit, the others dark. */
  z.strictObject({ show: z.literal('lit'), lamps: z.array(slugSchema).default([]), seconds }),
]);
export type LampStretch = z.infer<typeof stretchSchema>;

const panelSchema = z.strictObject({
  /** In sensor order. */
  lamps: z.array(slugSchema).min(1),
  ready: z.array(slugSchema),
  selector: slugSchema,
  weights: z.record(slugSchema, z.number().int().positive()),
});
export type Panel = z.infer<typeof panelSchema>;

const measuredSchema = z.union([
  z.number(),
  z.enum(['overload', 'nan', 'timeout', 'garbage', 'unplugged']),
  /** The value comes, and something is wrong with how: after its time-out, twice, behind an older one, half of it, between NULs. */
  z.strictObject({ late: z.number() }),
  z.strictObject({ twice: z.number() }),
  z.strictObject({ stale: z.number() }),
  z.strictObject({ half: z.number() }),
  z.strictObject({ nuls: z.number() }),
  /** The plug is out for so many seconds. */
  z.strictObject({ unplugged: seconds }),
]);
export type Measured = z.infer<typeof measuredSchema>;
/** In the order they are measured; the last one stays. */
const measuresSchema = z.array(measuredSchema).min(1);

/** What goes wrong with the light probe while it is read: `at` seconds into a capture, once each, in the first capture that lasts so long. */
const probeFaultSchema = z.discriminatedUnion('fault', [
  /** The plug is out for so long; its clock begins again at 0. */
  z.strictObject({ fault: z.literal('unplug'), at: seconds, seconds }),
  /** It sends nothing for so long. */
  z.strictObject({ fault: z.literal('silence'), at: seconds, seconds }),
  /** Its clock begins again at 0. */
  z.strictObject({ fault: z.literal('restart'), at: seconds }),
]);
export type ProbeFault = z.infer<typeof probeFaultSchema>;

const instrumentName = z.enum(['probe', 'meter', 'insulation', 'leakage']);

/** What is on the bench, and what the technician in front of it does. A shop can write its own for trials: `--rig sim:FILE.yaml`. */
export const scenarioSchema = z.strictObject({
  format: z.literal('refettle.scenario'),
  version: z.literal(1),
  name: z.string().min(1),
  /** How many times faster than life the lamps run. */
  speed: z.number().positive(),
  seed: z.number().int().default(1),
  family: slugSchema,
  panel: panelSchema,
  lampPlans: z.record(slugSchema, z.array(stretchSchema).min(1)),
  /** Which plan a step sees, by step id or else by kind, before and after the repair. */
  lampsAt: z.strictObject({ before: z.record(z.string(), slugSchema), after: z.record(z.string(), slugSchema) }),
  /** By check id, in the unit given. `after` the repair, where that differs. */
  measurements: z.record(
    slugSchema,
    z.strictObject({ unit: measuredCheckSchema.shape.unit, before: measuresSchema, after: measuresSchema.optional() }),
  ),
  /** By step id or else by step kind. `answersAfter` goes first once the machine was repaired. */
  answers: z.record(z.string(), z.string()).default({}),
  answersAfter: z.record(z.string(), z.string()).default({}),
  /** What a repair step records, by step id or `repair`. */
  repairs: z.record(z.string(), repairBodySchema).default({}),
  /** The share of probe lines that come damaged, and that never come. */
  probeTrouble: z.strictObject({ damaged: z.number().min(0).max(1), missing: z.number().min(0).max(1) }).optional(),
  probeFaults: z.array(probeFaultSchema).default([]),
  /** Two instruments whose plugs are swapped. */
  swapped: z.tuple([instrumentName, instrumentName]).optional(),
  /** How long a run waits for an unplugged instrument, in real seconds; as any rig unless told. */
  reconnectSeconds: z.number().nonnegative().optional(),
});
export type Scenario = z.infer<typeof scenarioSchema>;

/** Reads a scenario. Refuses (BadInputError) what is none, and names that point nowhere. */
export function parseScenario(text: string, file: string): Scenario {
  let content: unknown;
  try {
    content = parseYaml(text);
  } catch (error) {
    throw new BadInputError(`the scenario is no YAML: ${error instanceof Error ? (error.message.split('\n')[0] ?? '') : ''}`, { file });
  }
  const parsed = scenarioSchema.safeParse(content);
  if (!parsed.success) {
    throw new BadInputError(
      `the scenario can't be used: ${parsed.error.issues.map((issue) => `${issue.path.join('.')}: ${issue.message}`).join('; ')}`,
      { file },
    );
  }
  const scenario = parsed.data;
  const unknownPlan = [...Object.values(scenario.lampsAt.before), ...Object.values(scenario.lampsAt.after)].find(
    (plan) => scenario.lampPlans[plan] === undefined,
  );
  if (unknownPlan !== undefined) throw new BadInputError(`the scenario has no lamp plan '${unknownPlan}'`, { file });
  const lamps = new Set(scenario.panel.lamps);
  const named = [
    ...scenario.panel.ready,
    scenario.panel.selector,
    ...Object.keys(scenario.panel.weights),
    ...Object.values(scenario.lampPlans)
      .flat()
      .flatMap((stretch) => (stretch.show === 'lit' ? stretch.lamps : [])),
  ];
  const unknownLamp = named.find((lamp) => !lamps.has(lamp));
  if (unknownLamp !== undefined) throw new BadInputError(`the scenario's panel has no lamp '${unknownLamp}'`, { file });
  return scenario;
}
