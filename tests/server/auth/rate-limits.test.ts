import request from 'supertest';
import { afterAll, beforeAll, beforeEach, expect, test } from 'vitest';
import { createApp } from '../../../server/app.js';
import { hashPassword } from '../../../server/auth/password.js';
import { setPassword } from '../../../server/auth/people-store.js';
import { problemIn, startTestServer, type TestServer } from '../../helpers/test-server.js';

const password = 'a mill race in March';
let server: TestServer;
let app: TestServer['app'];
beforeAll(async () => {
  server = await startTestServer();
  await setPassword(server.deps.db, server.people.lead.id, await hashPassword(password), server.time.now);
});
beforeEach(() => {
  app = createApp(server.deps); // counts live in the app
});
afterAll(() => server.close());

const signIn = (email: string, word: string, address = '192.0.2.1') =>
  request(app).post('/api/sessions').set('X-Forwarded-For', address).send({ email, password: word });

test('When one address is tried ten times with wrong passwords, then even the right one has to wait, and is told how long', async () => {
  for (let i = 0; i < 10; i += 1)
    expect((await signIn(server.people.lead.email, `guess ${String(i)}`, `192.0.2.${String(i)}`)).status).toBe(401);

  const response = await signIn(server.people.lead.email.toUpperCase(), password, '192.0.2.99');
  expect(problemIn(response)).toMatchObject({ status: 429, kind: 'too-many' });
  const seconds = Number(response.headers['retry-after']);
  expect(seconds).toBeGreaterThan(0);
  expect(seconds).toBeLessThanOrEqual(15 * 60);
  expect((await signIn(server.people.sales.email, 'x', '192.0.2.99')).status).toBe(401); // somebody else is not held up
});

test('When one address on the net tries many accounts, then it is slowed down as a whole', async () => {
  for (let i = 0; i < 50; i += 1) expect((await signIn(`nobody${String(i)}@millrace.example`, 'x')).status).toBe(401);
  expect((await signIn('nobody99@millrace.example', 'x')).status).toBe(429);
  expect((await signIn('nobody99@millrace.example', 'x', '192.0.2.2')).status).toBe(401);
});

test('When people sign in rightly all day from one address, then nobody is held up', async () => {
  for (let i = 0; i < 60; i += 1) expect((await signIn(server.people.lead.email, password)).status).toBe(201);
});

test('When a tag is asked for with wrong words from many addresses, then the guessing ends', async () => {
  const look = (i: number) =>
    request(app)
      .get('/api/public/tags/0001-1?word=QQQQ')
      .set('X-Forwarded-For', `198.51.100.${String(i)}`);
  for (let i = 0; i < 30; i += 1) expect((await look(i)).status).toBe(200);
  expect((await look(99)).status).toBe(429);
});

test('When one address looks up tags without end, then it has to wait', async () => {
  const statuses: number[] = [];
  for (let i = 0; i < 121; i += 1) statuses.push((await request(app).get(`/api/public/tags/${String(i)}-1?word=QQQQ`)).status);
  expect(statuses.slice(0, 120).every((status) => status === 200)).toBe(true);
  expect(statuses[120]).toBe(429);
});
