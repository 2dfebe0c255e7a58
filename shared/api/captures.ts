import { z } from 'zod';
import { decodeAnswerSchema } from '../decode/answer.js';
import { captureBodySchema, personRefSchema } from '../history/events.js';
import { faceSchema } from '../lamps/face.js';
import { sheetSchema } from '../sheet/schema.js';

/** A capture as the bench sends it: the file's text, line for line. */
export const newCaptureSchema = z.strictObject({
  id: z.uuid(),
  file: z.string().min(1, 'the capture file is empty').max(30_000_000),
  fromFile: z.boolean().default(false),
  at: z.iso.datetime({ offset: true }),
});
export const capturePageSchema = z.strictObject({
  id: z.string(),
  unit: z.strictObject({ number: z.number().int(), maker: z.string(), model: z.string() }),
  at: z.string(),
  by: personRefSchema,
  runId: z.string().optional(),
  simulated: z.boolean(),
  capture: captureBodySchema,
  /** The file's text; the page draws it with the same functions that decoded it. */
  file: z.string(),
  sheet: sheetSchema,
  faces: z.record(z.string(), faceSchema),
});
export type CapturePage = z.infer<typeof capturePageSchema>;
export const captureStoredSchema = z.strictObject({ id: z.string(), answer: decodeAnswerSchema });
