import { z } from 'zod';

/** Lists page by cursor: hand `next` back as `cursor`. No `next`: that was the last page. */
export const pageQuerySchema = z.strictObject({
  cursor: z.string().max(200).optional(),
  limit: z.coerce.number().int().min(1).max(200).default(50),
});
export const pageOf = <T extends z.ZodType>(item: T) => z.strictObject({ items: z.array(item), next: z.string().optional() });
