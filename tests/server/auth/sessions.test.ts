import request from 'supertest';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import { hashPassword } from '../../../server/auth/password.js';
import { setPassword } from '../../../server/auth/people-store.js';
import { tokenHash } from '../../../server/auth/token.js';
import { problemIn, startTestServer, type TestServer } from '../../helpers/test-server.js';

const password = 'a mill race in March';
let server: TestServer;

beforeAll(async () => {
  server = await startTestServer();
  await setPassword(server.deps.db, server.people.lead.id, await hashPassword(password), server.time.now);
  server.people.lead.token = (await server.ok('signIn', { body: { email: server.people.lead.email, password } })).token ?? '';
});
afterAll(() => server.close());

const signIn = (body: object) => request(server.app).post('/api/sessions').send(body);
const me = (token: string) => request(server.app).get('/api/me').set('Authorization', `Bearer ${token}`);
const cookieFrom = (response: { headers: Record<string, unknown> }): string => (response.headers['set-cookie'] as string[])[0] ?? '';

describe('Signing in', () => {
  test('When the password is right, then the answer holds a token of 256 bits, and only its hash is stored', async () => {
    const { token, user } = await server.ok('signIn', { body: { email: ` ${server.people.lead.email.toUpperCase()}`, password } });

    expect(user).toEqual({ id: server.people.lead.id, name: 'Maren Holt', email: 'maren.holt@millrace.example', role: 'lead' });
    expect(Buffer.from(token ?? '', 'base64url')).toHaveLength(32);
    const stored = await server.deps.db('sessions').pluck<Buffer[]>('token_hash');
    expect(stored.some((hash) => hash.equals(tokenHash(token ?? '')))).toBe(true);
    const dump = JSON.stringify(await server.deps.db('sessions').select('*')) + JSON.stringify(await server.deps.db('people').select('*'));
    expect(dump).not.toContain(token);
    expect(dump).not.toContain(password);
    expect((await me(token ?? '')).status).toBe(200);
  });

  test('When a password is stored, then it is argon2id with at least the parameters that OWASP asks for', async () => {
    // OWASP Password Storage Cheat Sheet: argon2id, 19 MiB of memory, 2 iterations, 1 degree of parallelism.
    expect(await hashPassword('x')).toMatch(/^\$argon2id\$v=19\$m=19456,t=2,p=1\$/);
  });

  test('When the address is unknown or the password is wrong, then both get the very same refusal, after about the same work', async () => {
    const timed = async (body: object) => {
      const begin = performance.now();
      const response = await signIn(body);
      return { status: response.status, body: response.body as unknown, ms: performance.now() - begin };
    };
    await timed({ email: 'warm.up@millrace.example', password: 'x' });
    const unknown = await timed({ email: 'nobody@millrace.example', password: 'x' });
    const wrong = await timed({ email: server.people.lead.email, password: 'x' });

    expect(unknown.status).toBe(401);
    expect(wrong.body).toEqual(unknown.body);
    // Both check a hash of 19 MiB: an answer without that work would come in about a millisecond.
    expect(unknown.ms).toBeGreaterThan(wrong.ms / 10);
  });

  test('When somebody no longer works here, then neither the password nor an older token lets them in', async () => {
    const person = await server.addPerson('sales', 'Left Long Ago');
    await setPassword(server.deps.db, person.id, await hashPassword(password), new Date(0));
    const { token } = await server.ok('signIn', { body: { email: person.email, password } });
    await server.deps.db('people').where({ id: person.id }).update({ active: false });

    expect((await me(token ?? '')).status).toBe(401);
    expect((await signIn({ email: person.email, password })).status).toBe(401);
  });

  test('When a month has passed, then the token is no longer good', async () => {
    const { token } = await server.ok('signIn', { body: { email: server.people.lead.email, password } });
    const before = server.time.now;
    server.time.now = new Date(before.getTime() + 29 * 86_400_000);
    expect((await me(token ?? '')).status).toBe(200);
    server.time.now = new Date(before.getTime() + 31 * 86_400_000);
    expect((await me(token ?? '')).status).toBe(401);
    server.time.now = before;
  });

  test('When somebody signs out, then that token is revoked and the others are not', async () => {
    const one = (await server.ok('signIn', { body: { email: server.people.lead.email, password } })).token ?? '';
    const other = (await server.ok('signIn', { body: { email: server.people.lead.email, password } })).token ?? '';
    await server.ok('signOut', { as: { ...server.people.lead, token: one } });

    expect((await me(one)).status).toBe(401);
    expect((await me(other)).status).toBe(200);
  });
});

describe('Where a token may stand', () => {
  test.each(['Basic bWFyZW46eA==', 'Bearer', 'Bearer two words', 'Bearer nonsense', ''])(
    'When the Authorization header is %j, then it is 401',
    async (header) => {
      const response = await request(server.app).get('/api/me').set('Authorization', header);
      expect(problemIn(response).status).toBe(401);
    },
  );

  test('When the token stands in the address, then it is refused, also beside a good header, and is not logged', async () => {
    const { token } = server.people.technician;
    const alone = await request(server.app).get(`/api/me?access_token=${token}`);
    const beside = await request(server.app).get(`/api/me?access_token=${token}`).set('Authorization', `Bearer ${token}`);
    const onPublic = await request(server.app).get(`/api/health?access_token=${token}`);

    expect([alone.status, beside.status, onPublic.status]).toEqual([401, 401, 401]);
    expect(server.logged.join('')).not.toContain(token);
  });

  test('When the token stands in the body, as JSON or as a form, then it lets nobody in', async () => {
    const { token } = server.people.technician;
    const asJson = await request(server.app).post('/api/units').set('Idempotency-Key', 'body-token').send({ access_token: token });
    const asForm = await request(server.app).post('/api/units').type('form').send({ access_token: token });

    expect([asJson.status, asForm.status]).toEqual([401, 401]);
  });

  test('When tokens, cookies and passwords went by, then none of them is in the log', async () => {
    const response = await signIn({ email: server.people.lead.email, password, keep: 'cookie' });
    await request(server.app).get('/api/me').set('Cookie', cookieFrom(response));

    const log = server.logged.join('');
    expect(log).toContain('signed in');
    for (const secret of [password, server.people.lead.token, cookieFrom(response).split(/[=;]/)[1]]) expect(log).not.toContain(secret);
  });
});

describe('The cookie', () => {
  const host = 'millrace.example:4780';
  const own = `http://${host}`;
  let cookie: string;
  beforeAll(async () => {
    const response = await request(server.app)
      .post('/api/sessions')
      .set('Host', host)
      .set('Origin', own)
      .send({ email: server.people.lead.email, password, keep: 'cookie' });
    expect(response.status).toBe(201);
    expect(response.body).toEqual({ user: expect.objectContaining({ role: 'lead' }) as unknown });
    cookie = cookieFrom(response);
  });
  const withdraw = (headers: Record<string, string>) =>
    request(server.app)
      .post('/api/tags/0001-1/withdrawal')
      .set('Host', host)
      .set('Cookie', cookie)
      .set(headers)
      .send({ reason: 'another machine' });

  test('When a browser signs in, then the token is out of reach of scripts and of other sites', () => {
    expect(cookie).toMatch(/; HttpOnly/);
    expect(cookie).toMatch(/; SameSite=Strict/);
    expect(cookie).not.toMatch(/; Secure/); // plain http in the house: a Secure cookie would never come back
  });

  test('When the browser came over the public https address, then the cookie is Secure', async () => {
    const response = await request(server.app)
      .post('/api/sessions')
      .set({ Host: 'tags.millrace.example', Origin: 'https://tags.millrace.example', 'Sec-Fetch-Site': 'same-origin' })
      .send({ email: server.people.lead.email, password, keep: 'cookie' });
    expect(cookieFrom(response)).toMatch(/; Secure/);
  });

  test('When the shop is reached both ways under one host name, then neither sign-in stands in the other’s way', async () => {
    const at = (Host: string, Cookie: string) => request(server.app).get('/api/me').set({ Host, Cookie });
    const street = { Host: 'tags.millrace.example', Origin: 'https://tags.millrace.example' };
    const signedIn = await request(server.app)
      .post('/api/sessions')
      .set(street)
      .send({ email: server.people.lead.email, password, keep: 'cookie' });
    // RFC 6265bis, section 4.1.3.2: with this prefix a browser takes it over https alone.
    const overHttps = /^(__Host-refettle_session=[\w-]+); /.exec(cookieFrom(signedIn))?.[1] ?? '';
    expect(cookie).toMatch(/^refettle_session=/);

    // The browser sends both wherever the connection is safe; each counts where it was set.
    await at(street.Host, `${cookie}; ${overHttps}`).expect(200);
    const out = await request(server.app)
      .delete('/api/sessions/current')
      .set({ ...street, Cookie: `${cookie}; ${overHttps}` });
    expect(cookieFrom(out)).toMatch(/^__Host-refettle_session=;.*; Secure/);
    await at(street.Host, `${cookie}; ${overHttps}`).expect(401);
    await at(host, cookie).expect(200);
  });

  test('When a page of ours reads or writes, then the cookie lets it in', async () => {
    expect((await request(server.app).get('/api/me').set('Cookie', cookie)).status).toBe(200);
    expect((await withdraw({ Origin: own })).status).toBe(404);
    expect((await withdraw({ 'Sec-Fetch-Site': 'same-origin' })).status).toBe(404);
  });

  test.each([
    [{}],
    [{ Origin: 'http://evil.example' }],
    [{ Origin: 'null' }],
    [{ Origin: 'https://millrace.example:4780' }],
    [{ Origin: 'http://millrace.example:4781' }],
    [{ 'Sec-Fetch-Site': 'same-site' }],
    [{ 'Sec-Fetch-Site': 'cross-site' }],
    [{ 'Sec-Fetch-Site': 'none' }],
    [{ Origin: own, 'Sec-Fetch-Site': 'cross-site' }],
    [{ Origin: 'http://evil.example', 'Sec-Fetch-Site': 'same-origin' }],
  ] as Record<string, string>[][])('When a write by cookie comes with %j, then it is 403', async (headers) => {
    expect(problemIn(await withdraw(headers ?? {}))).toMatchObject({ status: 403, kind: 'origin' });
  });

  test('When another site signs a browser in, then it is 403', async () => {
    const response = await request(server.app)
      .post('/api/sessions')
      .set('Host', host)
      .set('Origin', 'http://evil.example')
      .send({ email: server.people.lead.email, password, keep: 'cookie' });
    expect(problemIn(response)).toMatchObject({ status: 403, kind: 'origin' });
  });

  test('When a write comes with a token in the header, then where it comes from does not matter', async () => {
    const response = await request(server.app)
      .post('/api/tags/0001-1/withdrawal')
      .set('Authorization', `Bearer ${server.people.lead.token}`)
      .set('Origin', 'http://evil.example')
      .send({ reason: 'another machine' });
    expect(response.status).toBe(404);
  });

  test('When the header holds a bad token beside a good cookie, then the cookie does not help', async () => {
    expect((await request(server.app).get('/api/me').set('Cookie', cookie).set('Authorization', 'Bearer nonsense')).status).toBe(401);
  });

  test('When the browser signs out, then the cookie is taken away and no longer good', async () => {
    const response = await request(server.app).delete('/api/sessions/current').set('Host', host).set('Cookie', cookie).set('Origin', own);
    expect(response.status).toBe(204);
    expect(cookieFrom(response)).toMatch(/refettle_session=;.*Expires=Thu, 01 Jan 1970/);
    expect((await request(server.app).get('/api/me').set('Cookie', cookie)).status).toBe(401);
  });
});
