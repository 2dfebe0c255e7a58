import { mkdirSync, mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import request from 'supertest';
import { afterAll, beforeAll, expect, test } from 'vitest';
import { createApp } from '../../server/app.js';
import { problemIn, startTestServer, type TestServer } from '../helpers/test-server.js';

let server: TestServer;
let folder: string;
beforeAll(async () => {
  folder = mkdtempSync(join(tmpdir(), 'refettle-web-'));
  const webDir = join(folder, '.hidden', 'web');
  mkdirSync(join(webDir, 'assets'), { recursive: true });
  writeFileSync(join(webDir, 'index.html'), '<!doctype html><title>Refettle</title>');
  writeFileSync(join(webDir, 'assets', 'main-abc123.js'), 'export {};');
  writeFileSync(join(webDir, 'icon.svg'), '<svg xmlns="http://www.w3.org/2000/svg"/>');
  server = await startTestServer({ webDir });
});
afterAll(async () => {
  await server.close();
  rmSync(folder, { recursive: true, force: true });
});

test.each(['/', '/units/412', '/t/0412-2/signature', '/first-admin', '/index.html'])(
  'When the browser asks for %s, then it gets the page, and asks again next time',
  async (path) => {
    const response = await request(server.app).get(path);
    expect(response.status).toBe(200);
    expect(response.text).toContain('<title>Refettle</title>');
    expect(response.headers['cache-control']).toBe('no-cache');
    expect(response.headers['content-security-policy']).toContain("script-src 'self'");
  },
);

test('When a file is named by its content, then it may be kept for ever; others not', async () => {
  expect((await request(server.app).get('/assets/main-abc123.js')).headers['cache-control']).toBe('public, max-age=31536000, immutable');
  expect((await request(server.app).get('/icon.svg')).headers['cache-control']).toBe('no-cache');
});

test('When a file of an older build is asked for, then it is 404 and not the page', async () => {
  expect(problemIn(await request(server.app).get('/assets/main-old.js')).status).toBe(404);
});

test('When an address below /api is unknown, then it is a problem and not the page', async () => {
  expect(problemIn(await request(server.app).get('/api/units/1/nothing')).status).toBe(404);
  expect(problemIn(await request(server.app).get('/api')).status).toBe(404);
  expect(problemIn(await request(server.app).post('/units')).status).toBe(404);
});

test('When the browser came by plain http, then it is not told to come back by https; when it came by the public address, then its page is all https', async () => {
  const headersAt = async (host: string, app = server.app) => (await request(app).get('/api/health').set('Host', host)).headers;
  const inTheHouse = await headersAt('192.168.1.5:4780');
  expect(inTheHouse['strict-transport-security']).toBeUndefined();
  expect(inTheHouse['content-security-policy']).not.toContain('upgrade-insecure-requests');
  expect(inTheHouse['cache-control']).toBe('no-store');
  expect(inTheHouse['x-powered-by']).toBeUndefined();

  // A proxy ends TLS, and the same host may have a plain door beside it: RFC 6797 would shut that one for the whole host.
  const outside = await headersAt('tags.millrace.example');
  expect(outside['strict-transport-security']).toBeUndefined();
  expect(outside['content-security-policy']).toContain('upgrade-insecure-requests');

  // Where the server has no plain door, it may be said; a year in seconds, and nothing of other hosts.
  const tls = { certFile: '/nowhere/chain.pem', keyFile: '/nowhere/key.pem' };
  const alone = createApp({ ...server.deps, config: { ...server.deps.config, tls } });
  expect((await headersAt('tags.millrace.example', alone))['strict-transport-security']).toBe('max-age=31536000');
});
