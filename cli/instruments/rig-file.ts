import { readFile } from 'node:fs/promises';
import { join } from 'node:path';
import { parse as parseYaml } from 'yaml';
import { z } from 'zod';
import { BadInputError } from '../../shared/errors.js';
import { baseUnitOf } from '../../shared/measure/convert-unit.js';
import { parseAccuracy } from '../../shared/measure/parse-accuracy.js';
import { measuredCheckSchema, slugSchema, type MeasuredCheck } from '../../shared/sheet/schema.js';
import { MEASURE_COMMANDS, type Quantity } from './meter.js';

const accuracyTextSchema = z.string().refine((text) => {
  try {
    return Boolean(parseAccuracy(text));
  } catch {
    return false;
  }
}, 'write percent of reading and digits as the data sheet has them, for example 0.5%+3');

/** One line of a meter's data sheet. `upTo` is the end of the range; the last line may leave it out. All in the specification's unit. */
const rangeSchema = z.strictObject({
  upTo: z.number().positive().optional(),
  accuracy: accuracyTextSchema,
  resolution: z.number().positive(),
});
export type MeterRange = z.infer<typeof rangeSchema>;

/** How good an instrument is at one quantity; smallest range first. */
export interface Specification {
  unit: MeasuredCheck['unit'];
  ranges: MeterRange[];
  /** What this meter sends for overload where that is less than SCPI's 9.9E37; in its base unit. */
  overloadFrom?: number | undefined;
}

/** In the file a meter of one range may write accuracy and resolution straight away. One schema for both, so that a fault is named where it is. */
const specificationSchema = z
  .strictObject({
    unit: measuredCheckSchema.shape.unit,
    ranges: z.array(rangeSchema).min(1).optional(),
    accuracy: accuracyTextSchema.optional(),
    resolution: z.number().positive().optional(),
    overloadFrom: z.number().positive().optional(),
  })
  .transform(({ unit, ranges, accuracy, resolution, overloadFrom }, context): Specification => {
    const single = accuracy !== undefined && resolution !== undefined ? [{ accuracy, resolution }] : undefined;
    const written = ranges ?? single;
    if (written === undefined || (ranges !== undefined && (accuracy !== undefined || resolution !== undefined))) {
      context.addIssue({ code: 'custom', message: 'give either ranges, or accuracy and resolution' });
      return z.NEVER;
    }
    return { unit, ranges: written, ...(overloadFrom === undefined ? {} : { overloadFrom }) };
  });

const instrumentBase = {
  id: z.string().min(1),
  port: z.string().min(1),
  baudRate: z.number().int().positive().optional(),
  /** What it answers to `*IDN?`. Written down, it is held against what answers, so that swapped plugs are found out. */
  identification: z.string().min(1).optional(),
};
const meterSchema = z.strictObject({
  ...instrumentBase,
  kind: z.enum(['meter', 'insulation-tester', 'leakage-meter']),
  /** What it measures, and how well. */
  accuracy: z.partialRecord(measuredCheckSchema.shape.quantity, specificationSchema),
  measureTimeoutMs: z.number().int().positive().optional(),
});
const probeSchema = z.strictObject({
  ...instrumentBase,
  kind: z.literal('light-probe'),
  /** The lamp each sensor looks at, in sensor order; as the sheet's panel order when absent. */
  sensors: z.array(slugSchema).min(1).optional(),
});
export type RigMeter = z.infer<typeof meterSchema>;
export type RigProbe = z.infer<typeof probeSchema>;

/** Long enough to find a plug under the bench (common practice, no published source). */
const USUAL_RECONNECT_SECONDS = 60;

/** A rig file: the instruments on one bench and the ports they hang on. */
export const rigSchema = z
  .strictObject({
    format: z.literal('refettle.rig'),
    version: z.literal(1),
    name: z.string().min(1),
    /** The probe's full scale in counts, and how many samples a second it sends. */
    scaleMax: z.number().int().positive().default(1023),
    sampleRateHz: z.number().positive().default(100),
    /** How long a run waits for an instrument that was unplugged; 0: not at all. */
    reconnectSeconds: z.number().nonnegative().default(USUAL_RECONNECT_SECONDS),
    instruments: z.array(z.discriminatedUnion('kind', [meterSchema, probeSchema])),
  })
  .superRefine((rig, context) => {
    rig.instruments.forEach((instrument, index) => {
      if (rig.instruments.findIndex(({ id }) => id === instrument.id) !== index) {
        context.addIssue({ code: 'custom', path: ['instruments', index, 'id'], message: `the instrument '${instrument.id}' stands twice` });
      }
      if (instrument.kind === 'light-probe') return;
      for (const [quantity, specification] of Object.entries(instrument.accuracy)) {
        const expected = MEASURE_COMMANDS[quantity as Quantity].unit;
        if (baseUnitOf(specification.unit) !== expected) {
          context.addIssue({
            code: 'custom',
            path: ['instruments', index, 'accuracy', quantity, 'unit'],
            message: `${quantity} is not measured in ${specification.unit}`,
          });
        }
      }
    });
  });
export type RigInstrument = RigMeter | RigProbe;
export type Rig = z.infer<typeof rigSchema>;

/** Where a bench keeps its rig file, in REFETTLE_HOME. */
export const RIG_FILE = 'rig.yaml';

/** Reads a rig file. Refuses (BadInputError) a file that isn't there, is no YAML, or says something that can't be. */
export async function loadRig(home: string, file: string = join(home, RIG_FILE)): Promise<Rig> {
  let text: string;
  try {
    text = await readFile(file, 'utf8');
  } catch {
    throw new BadInputError(
      'there is no such rig file: refettle rig check asks the ports of this machine and writes one; or use --rig sim:heron-good',
      { file },
    );
  }
  return parseRig(text, file);
}

/** Reads the text of a rig file; `file` stands in the messages. */
export function parseRig(text: string, file: string): Rig {
  let content: unknown;
  try {
    content = parseYaml(text);
  } catch (error) {
    throw new BadInputError(`the rig file is no YAML: ${error instanceof Error ? (error.message.split('\n')[0] ?? '') : ''}`, { file });
  }
  const parsed = rigSchema.safeParse(content);
  if (parsed.success) return parsed.data;
  const reasons = parsed.error.issues.map((issue) => `${issue.path.length === 0 ? 'the file' : issue.path.join('.')}: ${issue.message}`);
  throw new BadInputError(`the rig file can't be used: ${reasons.join('; ')}`, { file });
}

/** The first instrument of the rig that measures this quantity. */
export function meterFor(rig: Rig, quantity: Quantity): { instrument: RigMeter; specification: Specification } | undefined {
  for (const instrument of rig.instruments) {
    if (instrument.kind === 'light-probe') continue;
    const specification = instrument.accuracy[quantity];
    if (specification) return { instrument, specification };
  }
  return undefined;
}

/** The rig's light probe, if it has one. */
export function probeOf(rig: Rig): RigProbe | undefined {
  return rig.instruments.find((instrument) => instrument.kind === 'light-probe');
}

/** The line of the data sheet that holds for a reading: the smallest range it fits in, as an autoranging meter chooses; the last one when it fits in none. */
export function rangeAt(specification: Specification, value: number): MeterRange {
  const last = specification.ranges.at(-1);
  const range = specification.ranges.find(({ upTo }) => upTo === undefined || Math.abs(value) <= upTo) ?? last;
  if (range === undefined) throw new BadInputError('a specification without a range');
  return range;
}
