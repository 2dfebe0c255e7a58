import { afterAll, beforeAll, expect, test } from 'vitest';
import { createFirstAdminLink } from '../../../server/auth/first-admin.js';
import { problemIn, startTestServer, type TestServer } from '../../helpers/test-server.js';

let server: TestServer;
beforeAll(async () => {
  server = await startTestServer({ config: { publicUrl: undefined } });
});
afterAll(() => server.close());

const emptyShop = async (): Promise<void> => {
  await server.deps.db('sessions').delete();
  await server.deps.db('people').delete();
};
const tokenOf = (link: string | undefined): string => new URL(link ?? '').hash.slice(1);
const admin = (token: string, email = 'joss@millrace.example') => ({
  body: { token, email, name: 'Joss Penn', password: 'a mill race in March' },
});

test('When people are there, then there is no link', async () => {
  expect(await createFirstAdminLink(server.deps, 'http://127.0.0.1:4780')).toBeUndefined();
});

test('When nobody is there, then the link makes one admin, once, and its token is stored nowhere', async () => {
  await emptyShop();
  const link = await createFirstAdminLink(server.deps, 'http://127.0.0.1:4780');
  expect(link).toMatch(/^http:\/\/127\.0\.0\.1:4780\/first-admin#[\w-]{43}$/);
  const token = tokenOf(link);
  expect(JSON.stringify(await server.deps.db('first_admin_links').select('*'))).not.toContain(token);

  const tries = await Promise.all([1, 2, 3].map((i) => server.send('createFirstAdmin', admin(token, `joss${String(i)}@millrace.example`))));
  expect(tries.map(({ status }) => status).sort()).toEqual([201, 401, 401]);
  expect(tries.find(({ status }) => status === 201)?.body).toMatchObject({ name: 'Joss Penn', role: 'admin' });
  expect(problemIn(await server.send('createFirstAdmin', admin(token))).status).toBe(401);
  expect(await createFirstAdminLink(server.deps, 'http://127.0.0.1:4780')).toBeUndefined();
});

test('When the link is a day old, or a newer one was printed, then it is no longer good', async () => {
  await emptyShop();
  const first = tokenOf(await createFirstAdminLink(server.deps, 'http://127.0.0.1:4780'));
  const second = tokenOf(await createFirstAdminLink(server.deps, 'http://127.0.0.1:4780'));
  expect((await server.send('createFirstAdmin', admin(first))).status).toBe(401);

  server.time.now = new Date(server.time.now.getTime() + 25 * 3_600_000);
  expect((await server.send('createFirstAdmin', admin(second))).status).toBe(401);
});
