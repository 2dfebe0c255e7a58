import { afterAll, beforeAll, expect, test } from 'vitest';
import { AUDIT_WHATS } from '../../../shared/api/audit.js';
import { hashPassword } from '../../../server/auth/password.js';
import { newToken, tokenHash } from '../../../server/auth/token.js';
import { audit, type AuditEntry } from '../../../server/history/audit.js';
import { freshDatabase, type FreshDatabase } from '../../helpers/fresh-database.js';

let fresh: FreshDatabase;
beforeAll(async () => {
  fresh = await freshDatabase();
});
afterAll(() => fresh.drop());

const maren = { id: '017f22e2-79b0-7cc3-98c4-dc0c0c07398f', name: 'Maren Holt', role: 'lead' } as const;
const entry = (rest: Partial<AuditEntry> = {}): AuditEntry => ({
  who: maren,
  what: 'sheet.added',
  subject: { kind: 'sheet', id: 'heron-h6', name: 'Heron H6' },
  after: { edition: 2 },
  at: new Date('2026-03-05T09:00:00Z'),
  ...rest,
});
const rows = (): Promise<Record<string, unknown>[]> => fresh.db('audit_log').select('*').orderBy('position');

test('When a change is put down, then who, what, when, before and after stand there', async () => {
  await audit(fresh.db, entry({ what: 'person.role-changed', before: { role: 'technician' }, after: { role: 'lead' } }));
  expect((await rows()).at(-1)).toMatchObject({
    at: new Date('2026-03-05T09:00:00Z'),
    who_id: maren.id,
    who_name: 'Maren Holt',
    who_role: 'lead',
    what: 'person.role-changed',
    subject_kind: 'sheet',
    before: { role: 'technician' },
    after: { role: 'lead' },
  });
});

test('When the transaction is rolled back, then nothing of it is in the log', async () => {
  const before = await rows();
  await expect(
    fresh.db.transaction(async (trx) => {
      await audit(trx, entry());
      throw new Error('the change failed');
    }),
  ).rejects.toThrow('the change failed');
  expect(await rows()).toEqual(before);
});

test.each([
  ["update audit_log set who_name = 'Somebody Else'", 'UPDATE'],
  ["update audit_log set after = null where what = 'none such'", 'UPDATE'],
  ['delete from audit_log', 'DELETE'],
  ['delete from audit_log where false', 'DELETE'],
  ['truncate audit_log', 'TRUNCATE'],
  ['truncate audit_log, people cascade', 'TRUNCATE'],
])("When the application's own role says %j, then the database refuses, and every row stays", async (sql, operation) => {
  await audit(fresh.db, entry());
  const before = await rows();
  // 23001 is restrict_violation (PostgreSQL, Appendix A: error codes).
  await expect(fresh.db.raw(sql)).rejects.toMatchObject({ code: '23001', message: expect.stringContaining(operation) as unknown });
  expect(await rows()).toEqual(before);
});

test('When a secret or its hash is handed in, under whatever name, then it does not get in', async () => {
  const token = newToken();
  const before = await rows();
  for (const values of [
    { password: 'a mill race in March' },
    { pin: '4711' },
    { newPassword: 'a mill race in March' },
    { bench: { token: 'short' } },
    { note: token },
    { list: [token] },
    { note: await hashPassword('x') },
    { note: tokenHash(token).toString('hex') },
  ])
    for (const place of ['before', 'after'] as const)
      await expect(audit(fresh.db, entry({ [place]: values }))).rejects.toThrow('takes no secrets');
  expect(await rows()).toEqual(before);
});

test('When somebody types a name or a reason that looks like a secret, then it stands there as it was typed', async () => {
  for (const typed of ['a'.repeat(43), 'f'.repeat(64), 'the $argon2 hash was printed'])
    for (const after of [{ reason: typed }, { name: typed }]) {
      await audit(fresh.db, entry({ after }));
      expect((await rows()).at(-1)).toMatchObject({ after });
    }
});

test('When a kind of change is named, then it says what it is about and what was done to it', () => {
  for (const what of AUDIT_WHATS) expect(what).toMatch(/^[a-z-]+\.[a-z-]+$/);
});
