import { z } from 'zod';
import { sheetSchema } from '../sheet/schema.js';

/** A sheet's file, YAML or JSON; its edition must be one above the newest. */
export const newSheetSchema = z.strictObject({ text: z.string().min(1, 'the sheet is empty').max(1_000_000) });
export const sheetRowSchema = z.strictObject({
  family: z.string(),
  title: z.string().optional(),
  appliance: z.string().optional(),
  edition: z.number().int(),
  at: z.string(),
});
export const sheetPageSchema = z.strictObject({
  sheet: sheetSchema,
  text: z.string(),
  editions: z.array(z.number().int()),
  at: z.string(),
});
