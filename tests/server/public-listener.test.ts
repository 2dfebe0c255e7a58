import { mkdirSync, mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { request as httpRequest, type Server } from 'node:http';
import type { AddressInfo } from 'node:net';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import { routes, routeUrl, type RouteName } from '../../shared/api/routes.js';
import { signaturePart } from '../../server/features/tags/tag-signature.js';
import { closeServer, listen } from '../../server/listen.js';
import { publicOnly } from '../../server/public-listener.js';
import { addHeron, signedOffUnit } from '../helpers/factories.js';
import { startTestServer, type TestServer } from '../helpers/test-server.js';

let server: TestServer;
let street: Server;
let folder: string;
let tag: Awaited<ReturnType<typeof signedOffUnit>>['tag'];
beforeAll(async () => {
  folder = mkdtempSync(join(tmpdir(), 'refettle-street-'));
  mkdirSync(join(folder, 'assets'));
  writeFileSync(join(folder, 'index.html'), '<!doctype html><title>Refettle</title>');
  writeFileSync(join(folder, 'assets', 'main-abc123.js'), 'export {};');
  server = await startTestServer({ webDir: folder });
  await addHeron(server);
  ({ tag } = await signedOffUnit(server));
  street = await listen(publicOnly(server.app), '127.0.0.1', 0);
});
afterAll(async () => {
  await closeServer(street);
  await server.close();
  rmSync(folder, { recursive: true, force: true });
});

/** As it is sent, with nothing made tidy on the way; with the rights of an admin. */
const ask = (method: string, path: string): Promise<{ status: number; text: string }> =>
  new Promise((resolve, reject) => {
    const { port } = street.address() as AddressInfo;
    const headers = { authorization: `Bearer ${server.people.admin.token}`, 'content-type': 'application/json' };
    httpRequest({ host: '127.0.0.1', port, method, path, headers }, (response) => {
      let text = '';
      response.setEncoding('utf8').on('data', (chunk: string) => (text += chunk));
      response.on('end', () => {
        resolve({ status: response.statusCode ?? 0, text });
      });
    })
      .on('error', reject)
      .end(['POST', 'PUT', 'PATCH'].includes(method) ? '{}' : undefined);
  });

// Written down here and not taken from the table: a route that becomes public to the street is a decision.
const FOR_THE_STREET: RouteName[] = ['getPublicTag', 'getPublicKeys'];
const anyParams = { number: 1, id: '017f22e2-79b0-7cc3-98c4-dc0c0c07398f', tag: '0001-1', family: 'heron-h6' };

describe('When the street asks for a route of the table, as an admin even', () => {
  test.each(Object.keys(routes) as RouteName[])('%s', async (name) => {
    const url = routeUrl(name, { params: anyParams });
    for (const method of ['GET', 'POST', 'PUT', 'PATCH', 'DELETE', 'OPTIONS']) {
      const { status, text } = await ask(method, url);
      const open = FOR_THE_STREET.includes(name) && method === 'GET';
      expect(status, `${method} ${url}`).toBe(open ? 200 : 404);
      if (!open) expect(text).toContain('There is nothing at this address.');
    }
  });
});

test.each(['/t', '/t/', '/t?tag=0001-1', '/t/0001-1', '/t/0001-1?word=7QKF', '/t/0001-1/signature', '/assets/main-abc123.js'])(
  'When the street asks for %s, then it is there',
  async (path) => {
    expect((await ask('GET', path)).status).toBe(200);
    expect((await ask('HEAD', path)).status).toBe(200);
    expect((await ask('POST', path)).status).toBe(404);
  },
);

test.each([
  ...['/', '/index.html', '/sign-in', '/first-admin', '/first-admin?token=x', '/units', '/units/0001', '/people', '/t/a/b/c', '/tags'],
  ...['/api', '/api/', '/api/openapi.json', '/api/health', '/api/public', '/api/public/tags', '/api/public/tags/', '/api/PUBLIC/keys'],
  // Ways round: each would be another address to whoever tidies it up.
  ...['/t/../units', '/t/%2e%2e/units', '/t/..%2funits', '/api/public/tags/../../units', '/api/public/tags/..%2F..%2Funits', '//units'],
  ...['/t//units', '/t/..', '/assets/../index.html', '/assets/x/y', '/T', 'http://127.0.0.1/api/units', '*', '/t\\..\\units'],
])('When the street asks for %s, then there is nothing', async (path) => {
  expect((await ask('GET', path)).status).toBe(404);
});

test('When a buyer scans the tag on the street, then the answer is that of the house, and no cookie or token counts', async () => {
  const { status, text } = await ask('GET', `/api/public/tags/${tag.state.number}?signature=${signaturePart(tag.jws)}`);
  expect(status).toBe(200);
  expect(JSON.parse(text)).toMatchObject({ standing: 'stands', content: { tag: tag.state.number } });
});
