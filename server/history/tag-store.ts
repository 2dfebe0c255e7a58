import { z } from 'zod';
import { tagContentSchema, type TagContent } from '../../shared/api/tags.js';
import type { Db } from '../db.js';

const rowSchema = z
  .object({
    number: z.string(),
    unit_id: z.string(),
    running: z.number(),
    content: tagContentSchema,
    jws: z.string(),
    look_up_word: z.string(),
    signed_off_at: z.date(),
    withdrawn_at: z.date().nullable(),
    withdrawn_reason: z.string().nullable(),
  })
  .transform((row) => ({
    number: row.number,
    unitId: row.unit_id,
    running: row.running,
    content: row.content,
    jws: row.jws,
    lookUpWord: row.look_up_word,
    signedOffAt: row.signed_off_at.toISOString(),
    withdrawn: row.withdrawn_at === null ? undefined : { at: row.withdrawn_at.toISOString(), reason: row.withdrawn_reason ?? '' },
  }));
export type StoredTag = z.output<typeof rowSchema>;

/** The newest tag of each of these units that ever had one. */
export async function newestTags(db: Db, unitIds: readonly string[]): Promise<Map<string, StoredTag>> {
  if (unitIds.length === 0) return new Map();
  const rows = z.array(rowSchema).parse(
    await db('tags')
      .distinctOn('unit_id')
      .whereIn('unit_id', [...unitIds])
      .orderBy([{ column: 'unit_id' }, { column: 'running', order: 'desc' }]),
  );
  return new Map(rows.map((tag) => [tag.unitId, tag]));
}

export const newestTag = async (db: Db, unitId: string): Promise<StoredTag | undefined> => (await newestTags(db, [unitId])).get(unitId);

export async function findTag(db: Db, number: string): Promise<StoredTag | undefined> {
  const row: unknown = await db('tags').where({ number }).first();
  return row === undefined ? undefined : rowSchema.parse(row);
}

/** The number of the unit that a tag hangs on. */
export async function unitNumberOfTag(db: Db, number: string): Promise<number | undefined> {
  const found: unknown = await db('tags').join('units', 'units.id', 'tags.unit_id').where('tags.number', number).first('units.number');
  return found === undefined ? undefined : z.object({ number: z.number() }).parse(found).number;
}

interface NewTag {
  unitId: string;
  running: number;
  content: TagContent;
  jws: string;
  signedOffBy: string;
}

export async function insertTag(db: Db, tag: NewTag): Promise<void> {
  await db('tags').insert({
    number: tag.content.tag,
    unit_id: tag.unitId,
    running: tag.running,
    content: JSON.stringify(tag.content),
    jws: tag.jws,
    look_up_word: tag.content.lookUpWord,
    signed_off_at: tag.content.signedOffAt,
    signed_off_by: tag.signedOffBy,
  });
}

export async function markWithdrawn(db: Db, number: string, at: Date, reason: string): Promise<void> {
  await db('tags').where({ number }).whereNull('withdrawn_at').update({ withdrawn_at: at, withdrawn_reason: reason });
}
