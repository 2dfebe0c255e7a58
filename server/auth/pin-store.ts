import { z } from 'zod';
import type { PinState } from '../../shared/api/benches.js';
import { roleSchema } from '../../shared/api/roles.js';
import type { PersonRef } from '../../shared/history/events.js';
import type { Db } from '../db.js';
import { nameKey } from './name-key.js';

const withPinSchema = z
  .object({ id: z.string(), name: z.string(), role: roleSchema, pin_hash: z.string(), pin_set_at: z.date() })
  .transform(({ pin_hash: pinHash, pin_set_at: at, ...person }) => ({ person, pinHash, pinSetAt: at.toISOString() }));
export type PersonWithPin = z.output<typeof withPinSchema>;

/**
 * Who signs on: by id, by e-mail address, or by a name that only one person has. Undefined where nobody is that, no longer works here,
 * or has no PIN: nobody at a bench is told which.
 */
export async function findPersonWithPin(
  db: Db,
  who: { person?: string | undefined; name?: string | undefined },
): Promise<PersonWithPin | undefined> {
  const query = db('people').where({ active: true }).select('id', 'name', 'role', 'pin_hash', 'pin_set_at', 'email_key');
  if (who.person !== undefined) void query.where({ id: who.person });
  else {
    const typed = nameKey(who.name ?? '');
    void query.where((either) => {
      void either.where({ email_key: typed }).orWhereRaw("lower(regexp_replace(trim(name), '\\s+', ' ', 'g')) = ?", [typed]);
    });
  }
  const rows = (await query) as { pin_hash: string | null; email_key: string }[];
  const byAddress = rows.filter((row) => row.email_key === nameKey(who.name ?? ''));
  const found = byAddress.length > 0 ? byAddress : rows;
  const [row] = found;
  return found.length === 1 && row && row.pin_hash !== null ? withPinSchema.parse(row) : undefined;
}

const stateSchema = z
  .object({
    id: z.string(),
    name: z.string(),
    role: roleSchema,
    active: z.boolean(),
    pin_set_at: z.date().nullable(),
    pin_set_by: z.string().nullable(),
    setter: z.string().nullable(),
  })
  .transform((row): PinState & { active: boolean } => ({
    person: { id: row.id, name: row.name, role: row.role },
    active: row.active,
    ...(row.pin_set_at ? { pinSetAt: row.pin_set_at.toISOString() } : {}),
    ...(row.setter !== null && row.pin_set_by !== row.id ? { pinSetBy: row.setter } : {}),
  }));

const states = (db: Db) =>
  db('people')
    .leftJoin('people as setter', 'setter.id', 'people.pin_set_by')
    .select('people.id', 'people.name', 'people.role', 'people.active', 'people.pin_set_at', 'people.pin_set_by', 'setter.name as setter');

const withoutActive = ({ active: _active, ...state }: PinState & { active: boolean }): PinState => state;

/** Undefined where there is no such person, or nobody who still works here. */
export async function findPinState(db: Db, personId: string): Promise<PinState | undefined> {
  const row: unknown = await states(db).where('people.id', personId).first();
  if (row === undefined) return undefined;
  const state = stateSchema.parse(row);
  return state.active ? withoutActive(state) : undefined;
}

/** Those who can work at a bench, in the order in which they were added, from behind `after`. */
export async function listPinStates(db: Db, roles: readonly string[], after: string | undefined, limit: number): Promise<PinState[]> {
  const query = states(db)
    .where('people.active', true)
    .whereIn('people.role', [...roles])
    .orderBy('people.id')
    .limit(limit);
  if (after !== undefined) void query.where('people.id', '>', after);
  return z
    .array(stateSchema)
    .parse(await query)
    .map(withoutActive);
}

export async function setPin(db: Db, personId: string, pinHash: string, by: PersonRef, now: Date): Promise<void> {
  await db('people').where({ id: personId }).update({ pin_hash: pinHash, pin_set_at: now, pin_set_by: by.id });
}

export async function clearPin(db: Db, personId: string): Promise<void> {
  await db('people').where({ id: personId }).update({ pin_hash: null, pin_set_at: null, pin_set_by: null });
}
