import { z } from 'zod';
import { sheetSchema, type Sheet } from '../../shared/sheet/schema.js';
import type { Db } from '../db.js';

const rowSchema = z
  .object({ content: sheetSchema, text: z.string(), added_at: z.date() })
  .transform(({ content, text, added_at: addedAt }) => ({ sheet: content, text, at: addedAt.toISOString() }));
export type StoredSheet = z.output<typeof rowSchema>;

const columns = ['content', 'text', 'added_at'];
const newest = (db: Db) =>
  db('sheets')
    .distinctOn('family')
    .select(columns)
    .orderBy([{ column: 'family' }, { column: 'edition', order: 'desc' }]);

/** The newest edition for each of these families that has a sheet. */
export async function newestSheets(db: Db, families: readonly string[]): Promise<Map<string, Sheet>> {
  if (families.length === 0) return new Map();
  const rows = z.array(rowSchema).parse(await newest(db).whereIn('family', [...families]));
  return new Map(rows.map(({ sheet }) => [sheet.family, sheet]));
}

export async function newestSheet(db: Db, family: string | undefined): Promise<Sheet | undefined> {
  return family === undefined ? undefined : (await newestSheets(db, [family])).get(family);
}

export async function listNewestSheets(db: Db, after: string | undefined, limit: number): Promise<StoredSheet[]> {
  const query = newest(db).limit(limit);
  if (after !== undefined) void query.where('family', '>', after);
  return z.array(rowSchema).parse(await query);
}

/** Of one edition, or of the newest. */
export async function findSheet(db: Db, family: string, edition: number | undefined): Promise<StoredSheet | undefined> {
  const query = db('sheets').where({ family }).orderBy('edition', 'desc').select(columns);
  if (edition !== undefined) void query.where({ edition });
  const row: unknown = await query.first();
  return row === undefined ? undefined : rowSchema.parse(row);
}

export async function editionsOf(db: Db, family: string): Promise<number[]> {
  return z.array(z.number()).parse(await db('sheets').where({ family }).orderBy('edition').pluck('edition'));
}

/** Two who add a sheet of one family come one after the other. */
export async function lockFamily(db: Db, family: string): Promise<void> {
  await db.raw('select pg_advisory_xact_lock(hashtextextended(?, 0))', [`sheet ${family}`]);
}

export async function insertSheet(db: Db, row: { id: string; sheet: Sheet; text: string; addedBy: string; addedAt: Date }): Promise<void> {
  await db('sheets').insert({
    id: row.id,
    family: row.sheet.family,
    edition: row.sheet.edition,
    content: JSON.stringify(row.sheet),
    text: row.text,
    added_by: row.addedBy,
    added_at: row.addedAt,
  });
}
