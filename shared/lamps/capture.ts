import { z } from 'zod';

/** The first line of a capture file (contract, section 1). */
export const captureHeaderSchema = z.looseObject({
  format: z.literal('refettle.lamps'),
  version: z.literal(1),
  capturedAt: z.iso.datetime(),
  source: z.enum(['probe', 'keys', 'clip', 'simulated']),
  lamps: z
    .array(z.string().min(1))
    .min(1)
    .refine((ids) => new Set(ids).size === ids.length, 'a lamp id stands twice'),
  scale: z.looseObject({ unit: z.string(), max: z.number().positive() }),
  sampleRateHz: z.number().positive().optional(),
  /** The unit number, as digits or as a number. */
  unit: z.union([z.string(), z.number().int()]).optional(),
  family: z.string().optional(),
  sheetEdition: z.number().int().optional(),
  clock: z.enum(['bench', 'probe']).optional(),
});
export type CaptureHeader = z.infer<typeof captureHeaderSchema>;

/** A capture in memory: times in whole microseconds since the start, one level a lamp and sample, 0 to `header.scale.max`. */
export interface Capture {
  header: CaptureHeader;
  timesUs: number[];
  /** `levels[column][sample]`, columns in the header's order. */
  levels: number[][];
  marks: { atUs: number; label: string }[];
  gaps: { atUs: number; lost: number }[];
  /** Absent when the capture was cut short. */
  endUs?: number;
  cut: boolean;
}
