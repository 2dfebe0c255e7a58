import { z } from 'zod';
import { personRowSchema, type PersonRow } from '../../shared/api/people.js';
import type { Role } from '../../shared/api/roles.js';
import { userSchema, type User } from '../../shared/api/sessions.js';
import type { Db } from '../db.js';
import { NotFoundError } from '../errors.js';
import { revokeSessions } from './session-store.js';

const emailKey = (email: string): string => email.trim().toLowerCase();

/** Without a hash: invited, and no password set yet. */
const withPasswordSchema = z.object({ user: userSchema, passwordHash: z.string().optional(), active: z.boolean() });
export type PersonWithPassword = z.infer<typeof withPasswordSchema>;

interface NewPerson {
  id: string;
  email: string;
  name: string;
  role: Role;
  /** Undefined: the person sets one by an invitation. */
  passwordHash: string | undefined;
  createdAt: Date;
}

function personOfRow(row: Record<string, unknown> | undefined): PersonWithPassword | undefined {
  if (!row) return undefined;
  const { id, name, email, role } = row;
  return withPasswordSchema.parse({
    user: { id, name, email, role },
    passwordHash: row['password_hash'] ?? undefined,
    active: row['active'],
  });
}

export async function findPersonByEmail(db: Db, email: string): Promise<PersonWithPassword | undefined> {
  return personOfRow(
    (await db('people')
      .where({ email_key: emailKey(email) })
      .first()) as Record<string, unknown> | undefined,
  );
}

/**
 * Somebody, held until the transaction ends.
 * - `out`: nobody does anything in their name meanwhile. Only after lockPeople: two who shut each other out would wait for ever.
 * - `for change`: nobody else changes anything about them; they go on working.
 * - `to act`: nobody shuts them out. Foreign keys take this lock anyway.
 * - `as they are`: nobody changes anything about them; many may look.
 */
export async function holdPerson(
  db: Db,
  id: string,
  why: 'out' | 'for change' | 'to act' | 'as they are',
): Promise<PersonWithPassword | undefined> {
  const query = db('people').where({ id }).first();
  if (why === 'out') void query.forUpdate();
  else if (why === 'for change') void query.forNoKeyUpdate();
  else if (why === 'to act') void query.forKeyShare();
  else void query.forShare();
  return personOfRow((await query) as Record<string, unknown> | undefined);
}

/** Those who change people come one after the other: each sees what the one before has done. */
export async function lockPeople(db: Db): Promise<void> {
  await db.raw("select pg_advisory_xact_lock(hashtextextended('people', 0))");
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
      password_hash: person.passwordHash ?? null,
      created_at: person.createdAt,
    })
    .onConflict('email_key')
    .ignore()
    .returning('id');
  return inserted.length > 0;
}

/** Every session of theirs ends with the old password; `but`: except the one of this token. Answers how many ended. */
export async function setPassword(db: Db, personId: string, passwordHash: string, now: Date, but?: string): Promise<number> {
  await db('people').where({ id: personId }).update({ password_hash: passwordHash });
  return revokeSessions(db, personId, now, but);
}

export async function setRole(db: Db, personId: string, role: Role): Promise<void> {
  await db('people').where({ id: personId }).update({ role });
}

export async function setActive(db: Db, personId: string, active: boolean): Promise<void> {
  await db('people').where({ id: personId }).update({ active });
}

/** Who may sign in, in the order in which they were added. */
export async function listActivePeople(db: Db): Promise<User[]> {
  const rows: unknown = await db('people').where({ active: true }).orderBy('id').select('id', 'name', 'email', 'role');
  return z.array(userSchema).parse(rows);
}

export async function anybodyThere(db: Db): Promise<boolean> {
  return (await db('people').first('id')) !== undefined;
}

/** Whether somebody else can do an admin's work: active, with a password. */
export async function isThereAnotherAdmin(db: Db, personId: string): Promise<boolean> {
  const other: unknown = await db('people')
    .where({ role: 'admin', active: true })
    .whereNot({ id: personId })
    .whereNotNull('password_hash')
    .first('id');
  return other !== undefined;
}

const rowSchema = z
  .object({
    id: z.string(),
    name: z.string(),
    email: z.string(),
    role: z.string(),
    active: z.boolean(),
    has_password: z.boolean(),
    created_at: z.date(),
    last_used_at: z.date().nullable(),
    sessions: z.number(),
    link_kind: z.string().nullable(),
    link_expires_at: z.date().nullable(),
  })
  .transform((row): PersonRow =>
    personRowSchema.parse({
      id: row.id,
      name: row.name,
      email: row.email,
      role: row.role,
      state: row.active ? (row.has_password ? 'active' : 'invited') : 'deactivated',
      addedAt: row.created_at.toISOString(),
      ...(row.last_used_at === null ? {} : { lastUsedAt: row.last_used_at.toISOString() }),
      sessions: row.sessions,
      ...(row.link_kind === null || row.link_expires_at === null
        ? {}
        : { link: { kind: row.link_kind, expiresAt: row.link_expires_at.toISOString() } }),
    }),
  );

const peopleRows = (db: Db, now: Date) =>
  db('people')
    .leftJoin(
      'person_links',
      (join) => void join.on('person_links.person_id', 'people.id').andOn('person_links.expires_at', '>', db.raw('?', [now])),
    )
    .select(
      'people.id',
      'people.name',
      'people.email',
      'people.role',
      'people.active',
      db.raw('people.password_hash is not null as has_password'),
      'people.created_at',
      db.raw('(select max(coalesce(last_used_at, created_at)) from sessions where person_id = people.id) as last_used_at'),
      db.raw(
        '(select count(*) from sessions where person_id = people.id and revoked_at is null and expires_at > ? and people.active) as sessions',
        [now],
      ),
      'person_links.kind as link_kind',
      'person_links.expires_at as link_expires_at',
    );

/** In the order in which they were added, from behind `after`. */
export async function listPeople(db: Db, after: string | undefined, limit: number, now: Date): Promise<PersonRow[]> {
  const query = peopleRows(db, now).orderBy('people.id').limit(limit);
  if (after !== undefined) void query.where('people.id', '>', after);
  return z.array(rowSchema).parse(await query);
}

export async function personRow(db: Db, id: string, now: Date): Promise<PersonRow | undefined> {
  const row: unknown = await peopleRows(db, now).where('people.id', id).first();
  return row === undefined ? undefined : rowSchema.parse(row);
}

export async function readPersonRow(db: Db, id: string, now: Date): Promise<PersonRow> {
  const row = await personRow(db, id, now);
  if (!row) throw new NotFoundError('There is no such person.');
  return row;
}
