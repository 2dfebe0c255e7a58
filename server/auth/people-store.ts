import { z } from 'zod';
import { userSchema, type User } from '../../shared/api/sessions.js';
import type { Role } from '../../shared/api/roles.js';
import type { Db } from '../db.js';

const emailKey = (email: string): string => email.trim().toLowerCase();

const withPasswordSchema = z.object({ user: userSchema, passwordHash: z.string(), active: z.boolean() });
type PersonWithPassword = z.infer<typeof withPasswordSchema>;

interface NewPerson {
  id: string;
  email: string;
  name: string;
  role: Role;
  passwordHash: string;
  createdAt: Date;
}

export async function findPersonByEmail(db: Db, email: string): Promise<PersonWithPassword | undefined> {
  const row = (await db('people')
    .where({ email_key: emailKey(email) })
    .first()) as Record<string, unknown> | undefined;
  if (!row) return undefined;
  const { id, name, email: spelled, role } = row;
  return withPasswordSchema.parse({ user: { id, name, email: spelled, role }, passwordHash: row['password_hash'], active: row['active'] });
}

/** False where somebody has this e-mail address already. */
export async function insertPerson(db: Db, person: NewPerson): Promise<boolean> {
  const { id, email, name, role } = person;
  const inserted: unknown[] = await db('people')
    .insert({
      id,
      email: email.trim(),
      email_key: emailKey(email),
      name,
      role,
      password_hash: person.passwordHash,
      created_at: person.createdAt,
    })
    .onConflict('email_key')
    .ignore()
    .returning('id');
  return inserted.length > 0;
}

export async function setPassword(db: Db, personId: string, passwordHash: string, now: Date): Promise<void> {
  await db('people').where({ id: personId }).update({ password_hash: passwordHash });
  await db('sessions').where({ person_id: personId }).whereNull('revoked_at').update({ revoked_at: now });
}

export async function anybodyThere(db: Db): Promise<boolean> {
  return (await db('people').first('id')) !== undefined;
}

/** In the order in which they were added, from behind `after`. */
export async function listPeople(db: Db, after: string | undefined, limit: number): Promise<User[]> {
  const query = db('people').select('id', 'name', 'email', 'role').orderBy('id').limit(limit);
  if (after !== undefined) void query.where('id', '>', after);
  return z.array(userSchema).parse(await query);
}
