import { z } from 'zod';
import { inspectionBodySchema, readingBodySchema, repairBodySchema, unitEventSchema } from '../history/events.js';

const recorded = { id: z.uuid(), at: z.iso.datetime({ offset: true }), simulated: z.boolean().default(false) };
export const newReadingSchema = z.strictObject({ ...recorded, reading: readingBodySchema });
export const newInspectionSchema = z.strictObject({ ...recorded, inspection: inspectionBodySchema });
export const newRepairSchema = z.strictObject({ ...recorded, repair: repairBodySchema });
/** What was stored: the event, with the verdict the server came to. */
export const eventStoredSchema = z.strictObject({ event: unitEventSchema });
