// What a proxy in front says of the browser, and who is believed.
import request from 'supertest';
import { afterAll, beforeAll, expect, test } from 'vitest';
import { hashPassword } from '../../server/auth/password.js';
import { insertPerson } from '../../server/auth/people-store.js';
import { startTestServer, type TestServer } from '../helpers/test-server.js';

const EMAIL = 'perrin@millrace.example';
const PASSWORD = 'a mill race in March';
const body = { email: EMAIL, password: PASSWORD, keep: 'cookie' };

async function shopBehind(trustedProxies: string[]): Promise<TestServer> {
  const server = await startTestServer({ config: { trustedProxies, publicUrl: undefined } });
  const person = { id: '019af7a0-0000-7000-8000-000000000001', name: 'Perrin Vale', email: EMAIL, role: 'lead' as const };
  await insertPerson(server.deps.db, { ...person, passwordHash: await hashPassword(PASSWORD), createdAt: server.time.now });
  return server;
}

let trusting: TestServer;
let wary: TestServer;
beforeAll(async () => {
  trusting = await shopBehind(['127.0.0.1', '::1', '::ffff:127.0.0.1']);
  wary = await shopBehind(['192.0.2.10']);
});
afterAll(async () => {
  await trusting.close();
  await wary.close();
});

const signIn = (server: TestServer, headers: Record<string, string>) => request(server.app).post('/api/sessions').set(headers).send(body);
const cookieOf = (response: { headers: Record<string, unknown> }): string =>
  String((response.headers['set-cookie'] as string[] | undefined)?.[0]);

test('When a trusted proxy ends TLS, then the cookie is Secure, and the origin is the one that the browser sees', async () => {
  const response = await signIn(trusting, {
    Host: '10.0.0.7:4780',
    Origin: 'https://shop.millrace.example',
    'X-Forwarded-Proto': 'https',
    'X-Forwarded-Host': 'shop.millrace.example',
    'X-Forwarded-For': '203.0.113.9',
  });
  expect(response.status).toBe(201);
  expect(cookieOf(response)).toMatch(/; HttpOnly; Secure; SameSite=Strict/);
});

test('When the proxy passes the Host header on, then that is enough', async () => {
  const response = await signIn(trusting, {
    Host: 'shop.millrace.example',
    Origin: 'https://shop.millrace.example',
    'X-Forwarded-Proto': 'https',
  });
  expect(response.status).toBe(201);
  expect(cookieOf(response)).toContain('Secure');
});

test('When a browser comes by plain http under a name of the house, then the cookie is not Secure, or it would be dropped', async () => {
  for (const server of [trusting, wary]) {
    const response = await signIn(server, { Host: 'workshop:4780', Origin: 'http://workshop:4780' });
    expect(response.status).toBe(201);
    expect(cookieOf(response)).not.toContain('Secure');
    expect(cookieOf(response)).toMatch(/; HttpOnly; SameSite=Strict/);
    expect(response.headers['strict-transport-security']).toBeUndefined();
  }
});

test('When somebody who is no trusted proxy says that it came by https from elsewhere, then it is not believed', async () => {
  const response = await signIn(wary, {
    Host: 'workshop:4780',
    Origin: 'https://shop.millrace.example',
    'X-Forwarded-Proto': 'https',
    'X-Forwarded-Host': 'shop.millrace.example',
  });
  expect(response.status).toBe(403);
});

test('When a guesser makes up addresses, then only a trusted proxy’s word counts against the limit', async () => {
  const tries = async (server: TestServer): Promise<string[]> => {
    const left: string[] = [];
    for (const last of [1, 2]) {
      const response = await request(server.app)
        .get('/api/public/tags/0001-1')
        .set('X-Forwarded-For', `203.0.113.${String(last)}`);
      left.push(/r=(\d+)/.exec(String(response.headers['ratelimit']))?.[1] ?? '');
    }
    return left;
  };
  const [one, two] = await tries(wary);
  expect(Number(two)).toBe(Number(one) - 1); // one client
  const [three, four] = await tries(trusting);
  expect(four).toBe(three); // two clients
});
