import { z } from 'zod';
import { InvalidError } from './errors.js';

/** Opaque for who pages; a wrong one is the caller's fault and says so. */
export const cursorOf = (place: string): string => Buffer.from(place).toString('base64url');

function placeOf<T>(cursor: string | undefined, schema: z.ZodType<T>): T | undefined {
  if (cursor === undefined) return undefined;
  const parsed = schema.safeParse(Buffer.from(cursor, 'base64url').toString());
  if (!parsed.success) throw new InvalidError([{ pointer: '/query/cursor', reason: 'is none that this list gave out' }]);
  return parsed.data;
}

const numberText = z
  .string()
  .regex(/^[1-9]\d{0,9}$/)
  .transform(Number)
  .pipe(z.number().max(2_147_483_647));

export const uuidCursor = (cursor: string | undefined): string | undefined => placeOf(cursor, z.uuid());
export const numberCursor = (cursor: string | undefined): number | undefined => placeOf(cursor, numberText);
export const slugCursor = (cursor: string | undefined): string | undefined => placeOf(cursor, z.string().regex(/^[a-z0-9-]{1,100}$/));

/** One row more than asked for was fetched: it says that there is a next page, and stays out of this one. */
export function pageOf<T>(rows: readonly T[], limit: number, cursorFor: (last: T) => string): { items: T[]; next?: string } {
  const items = rows.slice(0, limit);
  const last = items.at(-1);
  return rows.length > limit && last !== undefined ? { items, next: cursorFor(last) } : { items };
}
