import { afterAll, beforeAll, beforeEach, describe, expect, test } from 'vitest';
import { ROLES } from '../../../shared/api/roles.js';
import type { AuditRow } from '../../../shared/api/audit.js';
import { hashPassword } from '../../../server/auth/password.js';
import { tokenHash } from '../../../server/auth/token.js';
import { newUnit } from '../../helpers/factories.js';
import { problemIn, startTestServer, type SignedInPerson, type TestServer } from '../../helpers/test-server.js';

let server: TestServer;
let admin: SignedInPerson;
beforeAll(async () => {
  server = await startTestServer();
  admin = server.people.admin;
});
afterAll(() => server.close());

const PASSWORD = 'a mill race in March';
const person = { email: 'tamsin@millrace.example', name: 'Tamsin Oake', role: 'technician', password: PASSWORD };
const tokenOf = (url: string): string => new URL(url).hash.slice(1);
let count = 0;
const freshEmail = (): string => `somebody${String((count += 1))}@millrace.example`;
const invite = (name = 'Tamsin Oake', role = 'technician') =>
  server.ok('invitePerson', { as: admin, body: { email: freshEmail(), name, role } });
const useLink = (token: string, password = PASSWORD) => server.send('useLink', { body: { token, password } });
/** Their sessions go on: nothing but the password is new. */
const givePassword = async ({ id }: SignedInPerson, password = PASSWORD): Promise<void> => {
  await server.deps
    .db('people')
    .where({ id })
    .update({ password_hash: await hashPassword(password) });
};
const audited = async (filter: Record<string, string> = {}): Promise<AuditRow[]> =>
  (await server.ok('listAudit', { as: admin, query: { limit: 200, ...filter } })).items;
const later = (ms: number): void => void (server.time.now = new Date(server.time.now.getTime() + ms));
const HOUR_MS = 3_600_000;

test('When an admin adds a person, then that person can sign in, and nobody else gets the address', async () => {
  const added = await server.ok('createPerson', { as: admin, body: person });
  expect(added).toMatchObject({ name: 'Tamsin Oake', role: 'technician' });
  expect((await server.ok('signIn', { body: { email: person.email, password: person.password } })).user).toEqual(added);
  const again = await server.send('createPerson', { as: admin, body: { ...person, email: 'TAMSIN@millrace.example' } });
  expect(problemIn(again)).toMatchObject({ status: 409, kind: 'conflict' });
  expect((await audited({ what: 'person.created' }))[0]).toMatchObject({
    who: { id: admin.id },
    subject: { id: added.id, name: 'Tamsin Oake' },
    after: { email: person.email, role: 'technician' },
  });
});

test('When the form is wrong, then each field says why, and the password is not echoed', async () => {
  const response = await server.send('createPerson', {
    as: admin,
    body: { email: 'x', name: '', role: 'owner', password: 'short-one' },
  });
  expect(problemIn(response).errors?.map(({ pointer }) => pointer)).toEqual(['/email', '/name', '/role', '/password']);
  expect(response.text).not.toContain('short-one');
});

test('When the people are listed, then each comes once and without a trace of a password', async () => {
  const seen: string[] = [];
  let cursor: string | undefined;
  do {
    const response = await server.send('listPeople', { as: admin, query: { limit: 2, ...(cursor === undefined ? {} : { cursor }) } });
    expect(response.text).not.toMatch(/argon2|password/);
    const page = response.body as { items: { email: string }[]; next?: string };
    seen.push(...page.items.map(({ email }) => email));
    cursor = page.next;
  } while (cursor !== undefined);
  expect(new Set(seen).size).toBe(seen.length);
  expect(seen).toHaveLength(6);
});

describe('An invitation', () => {
  test('When somebody is invited, then the link says for whom it is, sets the password once, and the person signs in', async () => {
    const { person: invited, link } = await invite();
    expect(invited).toMatchObject({ state: 'invited', sessions: 0, link: { kind: 'invitation' } });
    expect(link).toMatchObject({ kind: 'invitation', onlyHere: false });
    // The token stands behind #, where no browser sends it and no proxy logs it; only its hash is stored.
    expect(link.url).toMatch(/\/link#[\w-]{43}$/);
    expect(JSON.stringify(await server.deps.db('person_links').select('*'))).not.toContain(tokenOf(link.url));
    expect((await server.send('signIn', { body: { email: invited.email, password: PASSWORD } })).status).toBe(401);

    const page = await server.ok('lookAtLink', { body: { token: tokenOf(link.url) } });
    expect(page).toEqual({
      name: 'Tamsin Oake',
      email: invited.email,
      kind: 'invitation',
      shop: 'Millrace Mend',
      expiresAt: link.expiresAt,
    });
    expect((await useLink(tokenOf(link.url))).body).toMatchObject({ id: invited.id });
    expect((await server.ok('signIn', { body: { email: invited.email, password: PASSWORD } })).user.id).toBe(invited.id);
    expect(await server.ok('getPerson', { as: admin, params: { id: invited.id } })).toMatchObject({ state: 'active', sessions: 1 });

    expect(problemIn(await useLink(tokenOf(link.url), 'a second password'))).toMatchObject({ status: 401, kind: 'not-signed-in' });
    expect(problemIn(await server.send('lookAtLink', { body: { token: tokenOf(link.url) } })).status).toBe(401);
    expect((await audited({ subject: invited.id })).map(({ what, who }) => [what, who?.name])).toEqual([
      ['sign-in.ok', 'Tamsin Oake'],
      ['person.joined', 'Tamsin Oake'],
      ['sign-in.failed', undefined],
      ['person.invited', 'Joss Penn'],
    ]);
  });

  test('When one link is used by several at the same moment, then one of them gets a yes, and that password is the one', async () => {
    const { person: invited, link } = await invite();
    const passwords = ['the first long password', 'the second long password', 'the third long password'];
    const answers = await Promise.all(passwords.map((password) => useLink(tokenOf(link.url), password)));
    expect(answers.map(({ status }) => status).sort()).toEqual([200, 401, 401]);
    const won = answers.findIndex(({ status }) => status === 200);
    for (const [index, password] of passwords.entries())
      expect((await server.send('signIn', { body: { email: invited.email, password } })).status).toBe(index === won ? 201 : 401);
  });

  test('When a week has passed, then the link no longer opens; a new one does, and ends the one before', async () => {
    const { person: invited, link } = await invite();
    later(8 * 24 * HOUR_MS);
    expect((await useLink(tokenOf(link.url))).status).toBe(401);
    const first = (await server.ok('makeLink', { as: admin, params: { id: invited.id } })).link;
    const second = (await server.ok('makeLink', { as: admin, params: { id: invited.id } })).link;
    expect([first.kind, second.kind]).toEqual(['invitation', 'invitation']);
    expect((await useLink(tokenOf(first.url))).status).toBe(401);
    expect((await useLink(tokenOf(second.url))).status).toBe(200);
  });

  test('When the password is too short, then it says so beside its field, and the link is still good', async () => {
    const { link } = await invite();
    const response = await useLink(tokenOf(link.url), 'short');
    expect(problemIn(response).errors).toEqual([{ pointer: '/password', reason: 'at least 12 characters' }]);
    expect((await useLink(tokenOf(link.url))).status).toBe(200);
  });

  test('When the admin came by this machine’s own address, then the link goes by the public one; without that it says that it opens only here', async () => {
    const only = await startTestServer({ config: { publicUrl: undefined } });
    const { link } = await only.ok('invitePerson', { as: only.people.admin, body: { email: freshEmail(), name: 'T', role: 'sales' } });
    expect(link).toMatchObject({ onlyHere: true, url: expect.stringMatching(/^http:\/\/127\.0\.0\.1:\d+\/link#/) as unknown });
    await only.close();
    // supertest comes by 127.0.0.1.
    expect((await invite()).link.url).toMatch(/^https:\/\/tags\.millrace\.example\/link#/);
  });
});

describe('A forgotten password', () => {
  test('When an admin makes a link and it is used, then the new password is good, the old one is not, and every session has ended', async () => {
    const forgetful = await server.addPerson('lead', 'Forgetful Lead');
    await givePassword(forgetful, 'the old long password');
    const { link } = await server.ok('makeLink', { as: admin, params: { id: forgetful.id } });
    expect(link.kind).toBe('reset');
    // Until it is used nothing changes.
    expect((await server.send('me', { as: forgetful })).status).toBe(200);
    expect((await useLink(tokenOf(link.url), 'a new long password')).status).toBe(200);
    expect((await server.send('me', { as: forgetful })).status).toBe(401);
    expect((await server.send('signIn', { body: { email: forgetful.email, password: 'the old long password' } })).status).toBe(401);
    expect((await server.send('signIn', { body: { email: forgetful.email, password: 'a new long password' } })).status).toBe(201);
    expect((await audited({ what: 'person.password-reset' }))[0]).toMatchObject({ who: { id: forgetful.id }, after: { sessionsEnded: 1 } });
  });

  test('When an admin wants a link for themselves, then it is refused: an open browser must not be enough', async () => {
    expect(problemIn(await server.send('makeLink', { as: admin, params: { id: admin.id } }))).toMatchObject({ status: 403, kind: 'role' });
  });
});

describe('The own password', () => {
  let me: SignedInPerson;
  beforeEach(async () => {
    me = await server.addPerson('sales', `Odile ${String((count += 1))}`);
    await givePassword(me);
    me.token = (await server.ok('signIn', { body: { email: me.email, password: PASSWORD } })).token ?? '';
  });

  test('When it is changed, then this session goes on and every other one has ended', async () => {
    const other = { ...me, token: (await server.ok('signIn', { body: { email: me.email, password: PASSWORD } })).token ?? '' };
    const body = { oldPassword: PASSWORD, newPassword: 'another long enough one' };
    // That one, and the one that the person was made with.
    expect(await server.ok('changePassword', { as: me, body })).toEqual({ ended: 2 });
    expect((await server.send('me', { as: me })).status).toBe(200);
    expect((await server.send('me', { as: other })).status).toBe(401);
    expect((await server.send('signIn', { body: { email: me.email, password: PASSWORD } })).status).toBe(401);
    expect((await audited({ what: 'person.password-changed' }))[0]).toMatchObject({ who: { id: me.id }, after: { sessionsEnded: 2 } });
  });

  test('When the old one is wrong, then it says so beside the field, nothing changes, and after ten tries it has to wait', async () => {
    const body = { oldPassword: 'not the password', newPassword: 'another long enough one' };
    for (let i = 0; i < 10; i += 1) {
      const response = await server.send('changePassword', { as: me, body });
      expect(problemIn(response).errors).toEqual([{ pointer: '/oldPassword', reason: 'is not your password' }]);
    }
    const right = { ...body, oldPassword: PASSWORD };
    expect(problemIn(await server.send('changePassword', { as: me, body: right }))).toMatchObject({ status: 429, kind: 'too-many' });
    expect((await server.send('signIn', { body: { email: me.email, password: PASSWORD } })).status).toBe(201);
    const wrong = await audited({ what: 'person.wrong-password', who: me.id });
    expect(wrong).toHaveLength(10);
    expect(wrong[0]).toMatchObject({ subject: { id: me.id }, after: { wanted: 'a new password' } });
  });

  test('When two changes come at the same moment, then one is done and the other finds another password', async () => {
    const change = (newPassword: string) =>
      server.send('changePassword', { as: me, body: { oldPassword: PASSWORD, newPassword } }).then(({ status }) => status);
    expect((await Promise.all([change('the first long password'), change('the second long password')])).sort()).toEqual([200, 422]);
  });
});

describe('A role', () => {
  test('When an admin changes it, then it holds from the next request on, and both are in the log', async () => {
    const someone = await server.addPerson('technician', 'Risen Quickly');
    const change = (role: string) => server.ok('changeRole', { as: admin, params: { id: someone.id }, body: { role } });
    expect(await change('lead')).toMatchObject({ role: 'lead' });
    expect((await server.ok('me', { as: someone })).user.role).toBe('lead');
    await change('lead');
    const rows = await audited({ what: 'person.role-changed', subject: someone.id });
    expect(rows).toHaveLength(1);
    expect(rows[0]).toMatchObject({ before: { role: 'technician' }, after: { role: 'lead' } });
  });

  test.each(ROLES)('When an admin makes themselves %s, then it is refused', async (role) => {
    const response = await server.send('changeRole', { as: admin, params: { id: admin.id }, body: { role } });
    expect(problemIn(response)).toMatchObject({ status: 403, kind: 'role' });
  });

  test('When two admins demote or shut out each other at the same moment, then an admin is left, and nobody waits for ever', async () => {
    for (const [one, other] of [
      ['changeRole', 'changeRole'],
      ['deactivatePerson', 'changeRole'],
      ['deactivatePerson', 'deactivatePerson'],
    ] as const) {
      const [a, b] = [
        await server.addPerson('admin', `A ${String((count += 1))}`),
        await server.addPerson('admin', `B ${String((count += 1))}`),
      ];
      await server.deps.db('people').where({ role: 'admin' }).whereNotIn('id', [a.id, b.id]).update({ active: false });
      const body = { changeRole: { role: 'lead' }, deactivatePerson: { reason: 'a quarrel' } };
      const answers = await Promise.all([
        server.send(one, { as: a, params: { id: b.id }, body: body[one] }),
        server.send(other, { as: b, params: { id: a.id }, body: body[other] }),
      ]);
      const statuses = answers.map(({ status }) => status);
      expect(statuses.filter((status) => status === 200)).toHaveLength(1);
      // The second is no admin any more, or nobody at all.
      expect([401, 403]).toContain(statuses.find((status) => status !== 200));
      const left: unknown[] = await server.deps.db('people').where({ role: 'admin', active: true });
      expect(left).toHaveLength(1);
      await server.deps.db('people').where({ id: admin.id }).update({ active: true });
      await server.deps.db('people').where({ role: 'admin' }).whereNot({ id: admin.id }).update({ role: 'sales' });
    }
  });

  test('When the last admin leaves, then it is refused; an invited admin who has no password yet does not count', async () => {
    await invite('Not Here Yet', 'admin');
    const leave = () => server.send('deactivatePerson', { as: admin, params: { id: admin.id }, body: { reason: 'a long holiday' } });
    const response = await leave();
    expect(problemIn(response)).toMatchObject({ status: 409, remedy: 'Make somebody else an admin first.' });
    await server.addPerson('admin', 'Second Admin');
    expect((await leave()).status).toBe(200);
    admin = await server.addPerson('admin', 'Third Admin');
  });
});

describe('Somebody who no longer works here', () => {
  const deactivate = (id: string) =>
    server.send('deactivatePerson', { as: admin, params: { id }, body: { reason: 'works elsewhere now' } });

  test('When a person is deactivated, then every session, link and sign-in ends at once, and the history stays theirs', async () => {
    const leaver = await server.addPerson('technician', 'Leaver One');
    await givePassword(leaver);
    const { number } = await server.ok('takeInUnit', { as: leaver, body: newUnit({ family: undefined }) });
    const { link } = await server.ok('makeLink', { as: admin, params: { id: leaver.id } });

    expect((await deactivate(leaver.id)).body).toMatchObject({ state: 'deactivated', sessions: 0 });
    expect((await server.send('me', { as: leaver })).status).toBe(401);
    expect((await useLink(tokenOf(link.url))).status).toBe(401);
    expect((await server.send('signIn', { body: { email: leaver.email, password: PASSWORD } })).status).toBe(401);
    expect((await server.ok('getUnit', { as: admin, params: { number } })).unit.takenInBy.name).toBe('Leaver One');
    expect((await audited({ what: 'person.deactivated', subject: leaver.id }))[0]).toMatchObject({
      before: { active: true },
      after: { active: false, reason: 'works elsewhere now', sessionsEnded: 1 },
    });
    expect(problemIn(await deactivate(leaver.id)).status).toBe(409);

    // Back again: the password of before is good, the sessions of before are not.
    await server.ok('activatePerson', { as: admin, params: { id: leaver.id } });
    expect((await server.send('me', { as: leaver })).status).toBe(401);
    expect((await server.send('signIn', { body: { email: leaver.email, password: PASSWORD } })).status).toBe(201);
    expect(problemIn(await server.send('activatePerson', { as: admin, params: { id: leaver.id } })).status).toBe(409);
  });

  test.each([
    ['deactivated', (id: string) => deactivate(id)],
    ['an admin no more', (id: string) => server.send('changeRole', { as: admin, params: { id }, body: { role: 'sales' } })],
  ])('When an admin is %s, then the links that they made open no longer: no way in is left in their hands', async (_what, shutOut) => {
    const leaver = await server.addPerson('admin', `Link Maker ${String((count += 1))}`);
    const other = await server.addPerson('technician', `Linked ${String((count += 1))}`);
    const { link } = await server.ok('makeLink', { as: leaver, params: { id: other.id } });
    const { link: kept } = await server.ok('makeLink', {
      as: admin,
      params: { id: (await server.addPerson('sales', `Kept Link ${String((count += 1))}`)).id },
    });
    expect((await shutOut(leaver.id)).status).toBe(200);
    expect((await useLink(tokenOf(link.url))).status).toBe(401);
    expect((await useLink(tokenOf(kept.url))).status).toBe(200);
    expect((await audited({ subject: leaver.id }))[0]?.after).toMatchObject({ linksEnded: 1 });
  });

  test('When a person is deactivated in the middle of their own request, then the request leaves nothing', async () => {
    const leaver = await server.addPerson('technician', 'Leaver Two');
    const units = async (): Promise<number> => (await server.deps.db('units').select('id')).length;
    const before = await units();
    // Somebody else holds the person, so that the request has been let in and waits when the deactivation comes.
    const holder = await server.deps.db.transaction();
    await holder('people').where({ id: leaver.id }).forUpdate().first();
    const request = server.send('takeInUnit', { as: leaver, body: newUnit({ family: undefined }) }).then((response) => response);
    await waiting('people');
    await holder('people').where({ id: leaver.id }).update({ active: false });
    await holder.commit();

    expect(problemIn(await request)).toMatchObject({ status: 401, kind: 'not-signed-in' });
    expect(await units()).toBe(before);
  });

  test('When a person signs in while being deactivated, then no session is left that could be used', async () => {
    const leaver = await server.addPerson('technician', 'Leaver Three');
    await givePassword(leaver);
    const body = { email: leaver.email, password: PASSWORD };
    const [signedIn] = await Promise.all([server.send('signIn', { body }), server.send('signIn', { body }), deactivate(leaver.id)]);
    const token = (signedIn.body as { token?: string }).token;
    if (token !== undefined) expect((await server.send('me', { as: { ...leaver, token } })).status).toBe(401);
    const left: unknown[] = await server.deps.db('sessions').where({ person_id: leaver.id }).whereNull('revoked_at');
    expect(left).toEqual([]);
  });

  /** Until a connection waits for a lock on this table. */
  async function waiting(table: string): Promise<void> {
    for (let i = 0; i < 200; i += 1) {
      const { rows } = await server.deps.db.raw<{ rows: unknown[] }>(
        "select 1 from pg_stat_activity where wait_event_type = 'Lock' and query like ? and datname = current_database()",
        [`%${table}%`],
      );
      if (rows.length > 0) return;
      await new Promise((resolve) => setTimeout(resolve, 10));
    }
    throw new Error('nothing waited');
  }
});

describe('Sessions', () => {
  test('When sessions are listed, then each says where from and since when, one is marked as this one, and no token is shown', async () => {
    const me = await server.addPerson('lead', 'Often Here');
    await givePassword(me);
    // User agents as RFC 9110, section 10.1.5 has them; the browser's is of the common form.
    const agents = ['refettle-terminal (bench-2)', 'Mozilla/5.0 (X11; Linux x86_64; rv:128.0) Gecko/20100101 Firefox/128.0', ''];
    const tokens: string[] = [];
    for (const agent of agents) {
      later(1000);
      const response = await server.send('signIn', { body: { email: me.email, password: PASSWORD } }).set('User-Agent', agent);
      tokens.push((response.body as { token: string }).token);
    }
    later(1000);
    const response = await server.send('listOwnSessions', { as: { ...me, token: tokens[1] ?? '' } });
    const { items } = response.body as { items: { id: string; from: string; current: boolean }[] };
    expect(items.map(({ from, current }) => [from, current])).toEqual([
      ['a program', false],
      ['Firefox on Linux', true],
      ['terminal on bench-2', false],
      ['unknown', false],
    ]);
    for (const token of tokens) {
      expect(response.text).not.toContain(token);
      expect(response.text).not.toContain(tokenHash(token).toString('hex'));
      expect(response.text).not.toContain(tokenHash(token).toString('base64url'));
    }
    // The admin sees the same, and no session of theirs among them.
    const seen = await server.ok('listSessions', { as: admin, params: { id: me.id } });
    expect(seen.items.map(({ id, current }) => [id, current])).toEqual(items.map(({ id }) => [id, false]));
    const paged = await server.ok('listSessions', { as: admin, params: { id: me.id }, query: { limit: 2 } });
    const rest = await server.ok('listSessions', { as: admin, params: { id: me.id }, query: { limit: 2, cursor: paged.next ?? '' } });
    expect([...paged.items, ...rest.items].map(({ id }) => id)).toEqual(items.map(({ id }) => id));
  });

  test('When a session is used, then that is remembered to the minute and written once a minute', async () => {
    const me = await server.addPerson('lead', 'Busy Hands');
    const lastUsed = async () => (await server.ok('listSessions', { as: admin, params: { id: me.id } })).items[0]?.lastUsedAt;
    expect(await lastUsed()).toBeUndefined();
    const first = server.time.now;
    await server.ok('me', { as: me });
    expect(await lastUsed()).toBe(first.toISOString());
    later(59_000);
    await server.ok('me', { as: me });
    expect(await lastUsed()).toBe(first.toISOString());
    later(1000);
    await server.ok('me', { as: me });
    expect(await lastUsed()).toBe(server.time.now.toISOString());
  });

  test('When somebody ends a session of their own, then it has ended; somebody else’s is not there for them', async () => {
    const [me, other] = [await server.addPerson('sales', 'Mine'), await server.addPerson('sales', 'Not Mine')];
    const idOf = async (as: SignedInPerson) => (await server.ok('listOwnSessions', { as })).items[0]?.id ?? '';
    const theirs = await idOf(other);
    expect(problemIn(await server.send('revokeOwnSession', { as: me, params: { session: theirs } })).status).toBe(404);
    expect((await server.send('me', { as: other })).status).toBe(200);
    await server.ok('revokeOwnSession', { as: me, params: { session: await idOf(me) } });
    expect((await server.send('me', { as: me })).status).toBe(401);
    await server.ok('revokeSession', { as: admin, params: { id: other.id, session: theirs } });
    expect((await server.send('me', { as: other })).status).toBe(401);
    expect(problemIn(await server.send('revokeSession', { as: admin, params: { id: other.id, session: theirs } })).status).toBe(404);
    expect((await audited({ what: 'session.revoked' })).slice(0, 2).map(({ who, subject }) => [who?.id, subject.name])).toEqual([
      [admin.id, 'Not Mine, unknown'],
      [me.id, 'Mine, unknown'],
    ]);
  });

  test('When all the others are ended, then this one goes on; when an admin ends all, then none does', async () => {
    const me = await server.addPerson('technician', 'Everywhere');
    await givePassword(me);
    const signIn = async () => ({
      ...me,
      token: (await server.ok('signIn', { body: { email: me.email, password: PASSWORD } })).token ?? '',
    });
    const [here, there] = [await signIn(), await signIn()];
    expect(await server.ok('revokeOtherSessions', { as: here })).toEqual({ ended: 2 });
    expect([(await server.send('me', { as: here })).status, (await server.send('me', { as: there })).status]).toEqual([200, 401]);
    expect(await server.ok('revokeSessions', { as: admin, params: { id: me.id } })).toEqual({ ended: 1 });
    expect((await server.send('me', { as: here })).status).toBe(401);
  });
});
