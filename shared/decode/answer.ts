import { z } from 'zod';

/** The answer of the decoder, as `refettle decode --json` prints it and the API stores it (contract, section 3). Times in seconds from t = 0. */
export const candidateSchema = z.strictObject({ code: z.string(), confidence: z.number() });
const stretch = { fromS: z.number(), toS: z.number() };
export const segmentSchema = z.discriminatedUnion('kind', [
  z.strictObject({ kind: z.literal('ready'), ...stretch }),
  z.strictObject({
    kind: z.literal('code'),
    ...stretch,
    code: z.string(),
    digits: z.record(z.string(), z.number()).optional(),
    repeats: z.number().optional(),
    confidence: z.number(),
  }),
  z.strictObject({ kind: z.literal('dark'), ...stretch }),
  z.strictObject({ kind: z.literal('unreadable'), ...stretch, reason: z.string(), candidates: z.array(candidateSchema) }),
]);
export type Segment = z.infer<typeof segmentSchema>;

export const decodedCodeSchema = z.strictObject({ code: z.string(), repeats: z.number().optional(), confidence: z.number() });

export const decodeAnswerSchema = z.strictObject({
  samples: z.number(),
  durationS: z.number(),
  lost: z.number(),
  cut: z.boolean(),
  deadLamps: z.array(z.string()),
  segments: z.array(segmentSchema),
  codes: z.array(decodedCodeSchema),
  warnings: z.array(z.string()),
});
export type DecodeAnswer = z.infer<typeof decodeAnswerSchema>;

/** One decoded phase for the strip chart: a selector state and the digit the lit lamps add up to. */
export interface PhaseView {
  fromS: number;
  toS: number;
  selectorLit: boolean;
  digit: number | null;
  /** Cut by the start, the end, a mark or a gap: not counted as a repeat. */
  whole: boolean;
}

/** What a page draws beside the answer: per lamp its threshold and lit level (in counts), its lit stretches, and the phases. */
export interface DecodeView {
  lamps: {
    id: string;
    threshold: number | null;
    litLevel: number | null;
    litFraction: number | null;
    lit: { fromS: number; toS: number }[];
  }[];
  phases: PhaseView[];
}
