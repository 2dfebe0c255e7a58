import { afterAll, beforeAll, expect, test } from 'vitest';
import type { AuditRow, AuditWhat } from '../../../shared/api/audit.js';
import { createFirstAdminLink } from '../../../server/auth/first-admin.js';
import { hashPassword } from '../../../server/auth/password.js';
import { audit } from '../../../server/history/audit.js';
import { addHeron, mendAndProve, rulesSeen, takeIn } from '../../helpers/factories.js';
import { problemIn, startTestServer, type SignedInPerson, type TestServer } from '../../helpers/test-server.js';

const PASSWORD = 'a mill race in March';
let server: TestServer;
let admin: SignedInPerson;
beforeAll(async () => {
  server = await startTestServer();
  admin = server.people.admin;
});
afterAll(() => server.close());

const listed = async (filter: Record<string, string | number> = {}): Promise<AuditRow[]> =>
  (await server.ok('listAudit', { as: admin, query: { limit: 200, ...filter } })).items;
const newest = async (what: AuditWhat): Promise<AuditRow | undefined> => (await listed({ what }))[0];
const exported = (query: Record<string, string> = {}) => server.send('exportAudit', { as: admin, query });

/** RFC 4180, read by its own grammar: fields in quotes may hold commas, line ends and doubled quotes. */
function readCsv(text: string): string[][] {
  const records: string[][] = [];
  let at = 0;
  while (at < text.length) {
    const record: string[] = [];
    for (;;) {
      if (text[at] === '"') {
        const closing = /(?:[^"]|"")*/y;
        closing.lastIndex = at + 1;
        const inside = closing.exec(text)?.[0] ?? '';
        record.push(inside.replaceAll('""', '"'));
        at += inside.length + 2;
      } else {
        const plain = /[^",\r\n]*/y;
        plain.lastIndex = at;
        record.push(plain.exec(text)?.[0] ?? '');
        at += record.at(-1)?.length ?? 0;
      }
      if (text[at] !== ',') break;
      at += 1;
    }
    expect(text.slice(at, at + 2)).toBe('\r\n');
    at += 2;
    records.push(record);
  }
  return records;
}

test('When sheets, tags and gates change, then each change stands in the log with who, what, before and after', async () => {
  const { lead } = server.people;
  await addHeron(server);
  expect(await newest('sheet.added')).toMatchObject({
    who: { id: lead.id, role: 'lead' },
    subject: { id: 'heron-h6' },
    after: { edition: 1 },
  });

  const { number } = await takeIn(server);
  await server.ok('recordOverride', { as: lead, params: { number }, body: { gate: 'dead tests', reason: 'the tester is away' } });
  expect(await newest('override.recorded')).toMatchObject({
    who: { id: lead.id },
    subject: { kind: 'unit', id: String(number).padStart(4, '0') },
    after: { gate: 'dead tests', reason: 'the tester is away' },
  });

  const unit = await takeIn(server);
  await mendAndProve(server, unit.number);
  const tag = await server.ok('signOff', { as: lead, params: { number: unit.number }, body: await rulesSeen(server, unit.number) });
  expect(await newest('tag.signed')).toMatchObject({ who: { id: lead.id }, subject: { kind: 'tag', id: tag.content.tag } });
  await server.ok('withdrawTag', { as: lead, params: { tag: tag.content.tag }, body: { reason: 'the wrong machine' } });
  expect(await newest('tag.withdrawn')).toMatchObject({
    who: { id: lead.id },
    subject: { id: tag.content.tag },
    before: { standing: 'stands' },
    after: { standing: 'withdrawn', reason: 'the wrong machine' },
  });
});

test('When a change is refused, then nothing of it is in the log', async () => {
  const before = await listed();
  const { admin: me, lead } = server.people;
  for (const response of [
    await server.send('changeRole', { as: me, params: { id: me.id }, body: { role: 'lead' } }),
    await server.send('withdrawTag', { as: lead, params: { tag: '9999-1' }, body: { reason: 'no such tag' } }),
    await server.send('invitePerson', { as: me, body: { email: lead.email, name: 'A', role: 'lead' } }),
    await server.send('activatePerson', { as: me, params: { id: lead.id } }),
  ])
    expect(response.status).toBeGreaterThanOrEqual(400);
  expect(await listed()).toEqual(before);
});

test('When a sign-in fails, then the log says whose and why, and of somebody unknown not even what was typed', async () => {
  const { lead } = server.people;
  const typed = 'my-secret-typed-into-the-wrong-field@millrace.example';
  await server.send('signIn', { body: { email: typed, password: 'x' } });
  expect(await newest('sign-in.failed')).toMatchObject({ subject: { id: '' }, after: { why: 'unknown' } });
  await server.send('signIn', { body: { email: lead.email, password: 'guessed wrongly' } });
  expect(await newest('sign-in.failed')).toMatchObject({ subject: { id: lead.id }, after: { why: 'wrong password' } });
  expect((await newest('sign-in.failed'))?.who).toBeUndefined();
  expect(JSON.stringify(await listed())).not.toMatch(/my-secret|guessed wrongly/);
});

test('When people come and go, then no password, token or hash of theirs is in the log', async () => {
  const passwords = ['the first long password', 'the second long password', 'the third long password'];
  const email = 'tamsin@millrace.example';
  const { person, link } = await server.ok('invitePerson', { as: admin, body: { email, name: 'Tamsin Oake', role: 'lead' } });
  const token = new URL(link.url).hash.slice(1);
  await server.ok('useLink', { body: { token, password: passwords[0] } });
  const signedIn = await server.ok('signIn', { body: { email, password: passwords[0] } });
  const as = { ...signedIn.user, token: signedIn.token ?? '' };
  await server.ok('changePassword', { as, body: { oldPassword: passwords[0], newPassword: passwords[1] } });
  const reset = await server.ok('makeLink', { as: admin, params: { id: person.id } });
  await server.ok('useLink', { body: { token: new URL(reset.link.url).hash.slice(1), password: passwords[2] } });
  await server.ok('deactivatePerson', { as: admin, params: { id: person.id }, body: { reason: 'moved away' } });
  await server.ok('activatePerson', { as: admin, params: { id: person.id } });

  const rows = await listed({ subject: person.id });
  expect(rows.map(({ what }) => what)).toEqual([
    'person.activated',
    'person.deactivated',
    'person.password-reset',
    'person.link-made',
    'person.password-changed',
    'sign-in.ok',
    'person.joined',
    'person.invited',
  ]);
  const stored = JSON.stringify(await server.deps.db('audit_log').select('*'));
  const hashes = await server.deps.db('people').whereNotNull('password_hash').pluck<string[]>('password_hash');
  for (const secret of [...passwords, token, reset.link.url, as.token, ...hashes]) expect(stored).not.toContain(secret);
});

test('When the first admin comes by the link, then that stands in the log with nobody before them', async () => {
  const empty = await startTestServer({ config: { publicUrl: undefined } });
  await empty.deps.db('sessions').delete();
  await empty.deps.db('people').delete();
  const token = new URL((await createFirstAdminLink(empty.deps, 'http://127.0.0.1:4780')) ?? '').hash.slice(1);
  const made = await empty.ok('createFirstAdmin', {
    body: { token, email: 'joss@millrace.example', name: 'Joss Penn', password: PASSWORD },
  });
  const { token: bearer } = await empty.ok('signIn', { body: { email: made.email, password: PASSWORD } });
  const { items } = await empty.ok('listAudit', { as: { ...made, token: bearer ?? '' } });
  expect(items.map(({ what, who }) => [what, who?.id])).toEqual([
    ['sign-in.ok', made.id],
    ['first-admin.created', undefined],
  ]);
  await empty.close();
});

test('When the log is filtered, then by who (id, e-mail, part of a name), what, subject and time, and each row comes once over the pages', async () => {
  const { lead } = server.people;
  await server.deps
    .db('people')
    .where({ id: lead.id })
    .update({ password_hash: await hashPassword(PASSWORD) });
  const day = new Date('2026-04-01T10:00:00Z');
  server.time.now = day;
  await server.ok('signIn', { body: { email: lead.email, password: PASSWORD } });
  server.time.now = new Date('2026-04-02T10:00:00Z');
  await server.ok('signIn', { body: { email: lead.email, password: PASSWORD } });

  const byId = await listed({ who: lead.id });
  expect(byId.length).toBeGreaterThan(4);
  expect(await listed({ who: lead.email.toUpperCase() })).toEqual(byId);
  expect(await listed({ who: 'maren' })).toEqual(byId);
  expect(await listed({ who: '%' })).toEqual([]);
  expect((await listed({ what: 'tag.signed' })).every(({ what }) => what === 'tag.signed')).toBe(true);
  expect((await listed({ subject: 'tag' })).every(({ subject }) => subject.kind === 'tag')).toBe(true);
  const onThatDay = await listed({ from: '2026-04-01T00:00:00Z', to: '2026-04-02T00:00:00+00:00' });
  expect(onThatDay.map(({ what, at }) => [what, at])).toEqual([['sign-in.ok', day.toISOString()]]);
  expect(problemIn(await server.send('listAudit', { as: admin, query: { what: 'nothing.known', from: 'yesterday' } })).errors?.length).toBe(
    2,
  );

  const all = await listed();
  const seen: number[] = [];
  let cursor: string | undefined;
  do {
    const page = await server.ok('listAudit', { as: admin, query: { limit: 3, ...(cursor === undefined ? {} : { cursor }) } });
    seen.push(...page.items.map(({ id }) => id));
    cursor = page.next;
  } while (cursor !== undefined);
  expect(seen).toEqual(all.map(({ id }) => id));
});

test('When the log is exported, then it is CSV as RFC 4180 has it, whole and oldest first, and nothing in it is a formula', async () => {
  const names = ['=1+2', '+1', '-1', '@sum', '\tx', 'said "so", and\nwent'];
  for (const name of names)
    await audit(server.deps.db, {
      who: undefined,
      what: 'person.invited',
      subject: { kind: 'person', id: 'formula', name },
      before: { name: 'a, "b"' },
      at: server.time.now,
    });
  const response = await exported();
  expect(response.headers['content-type']).toBe('text/csv; charset=utf-8');
  expect(response.headers['content-disposition']).toBe('attachment; filename=refettle-audit-2026-04-02.csv');
  const [head, ...records] = readCsv(response.text);
  expect(head).toEqual(['number', 'at', 'who', 'who_role', 'who_id', 'what', 'subject_kind', 'subject', 'subject_id', 'before', 'after']);
  const rows = (await listed()).reverse();
  expect(records.map(([number]) => Number(number))).toEqual(rows.map(({ id }) => id));
  // OWASP, CSV injection: what begins with = + - @ tab or carriage return is a formula to a spreadsheet.
  for (const field of records.flat()) expect(field).not.toMatch(/^[=+\-@\t\r]/);
  const mine = records.filter((record) => record[8] === 'formula');
  expect(mine.map((record) => record[7])).toEqual(["'=1+2", "'+1", "'-1", "'@sum", "'\tx", 'said "so", and\nwent']);
  expect(JSON.parse(mine[0]?.[9] ?? '')).toEqual({ name: 'a, "b"' });

  const some = readCsv((await exported({ what: 'tag.signed' })).text);
  expect(some.slice(1).every((record) => record[5] === 'tag.signed')).toBe(true);
  expect(readCsv((await exported({ who: 'nobody of this name' })).text)).toEqual([head]);
  expect(problemIn(await exported({ what: 'nothing.known' })).status).toBe(422);
});

test('When the log is long, then the export holds every row once, however many pieces it takes', async () => {
  await server.deps.db.raw(
    `insert into audit_log (at, what, subject_kind, subject_id, subject_name)
     select ?::timestamptz, 'sign-in.failed', 'person', 'many', 'Many' from generate_series(1, 2500)`,
    [server.time.now],
  );
  const records = readCsv((await exported({ subject: 'many' })).text).slice(1);
  expect(records).toHaveLength(2500);
  expect(new Set(records.map(([number]) => number)).size).toBe(2500);
});
