// A workshop's network: the browser of another machine, by a name and not by 127.0.0.1.
import { mkdtempSync, rmSync } from 'node:fs';
import type { Server } from 'node:http';
import type { AddressInfo } from 'node:net';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { chromium, type Browser, type BrowserContext, type Page } from 'playwright-core';
import { PNG } from 'pngjs';
import { pino } from 'pino';
import { afterAll, beforeAll, describe, expect, inject, test } from 'vitest';
import { createFirstAdminLink } from '../../server/auth/first-admin.js';
import { closeServer, listen } from '../../server/listen.js';
import { publicOnly } from '../../server/public-listener.js';
import { chromiumPath, settled } from '../helpers/browser.js';
import { makeCertificate } from '../helpers/certificate.js';
import { addHeron, signedOffUnit } from '../helpers/factories.js';
import { startTestServer, type TestServer } from '../helpers/test-server.js';

const NAME = 'workshop.test';
let browser: Browser;
let folder: string;
beforeAll(async () => {
  folder = mkdtempSync(join(tmpdir(), 'refettle-network-'));
  // As a name server of the house would: the browser takes 127.0.0.1 for trustworthy, and a name it does not.
  browser = await chromium.launch({
    executablePath: chromiumPath(),
    args: ['--headless', '--no-sandbox', '--disable-gpu', '--disable-quic', `--host-resolver-rules=MAP ${NAME} 127.0.0.1`],
  });
});
afterAll(async () => {
  await browser.close();
  rmSync(folder, { recursive: true, force: true });
});

interface House {
  server: TestServer;
  http: Server;
  base: string;
}

async function openHouse({ https }: { https: boolean }): Promise<House> {
  const server = await startTestServer({ config: { host: '0.0.0.0', publicUrl: undefined }, webDir: inject('webDir') });
  server.time.now = new Date();
  const tls = https ? { files: makeCertificate(folder, NAME), log: pino({ level: 'silent' }) } : undefined;
  const http = await listen(server.app, '0.0.0.0', 0, { tls });
  return { server, http, base: `${https ? 'https' : 'http'}://${NAME}:${String((http.address() as AddressInfo).port)}` };
}

/** How many colours there are on a picture of the page: a blank one has one. */
async function coloursOf(page: Page): Promise<number> {
  const { data } = PNG.sync.read(await page.screenshot());
  const seen = new Set<number>();
  for (let at = 0; at < data.length; at += 4) seen.add(data.readUInt32BE(at));
  return seen.size;
}

const complaintsOf = (page: Page): string[] => {
  const complaints: string[] = [];
  page.on('pageerror', (error) => complaints.push(error.message));
  page.on('console', (message) => {
    if (['error', 'warning'].includes(message.type()) && !message.text().startsWith('Failed to load resource'))
      complaints.push(message.text());
  });
  return complaints;
};

const sessionCookie = async (context: BrowserContext) => (await context.cookies()).find(({ name }) => name.includes('refettle_session'));

describe.each([
  { scheme: 'http', https: false },
  { scheme: 'https, with a certificate that the shop made itself', https: true },
])('When the shop is looked at over $scheme under a name of the house', ({ https }) => {
  let house: House;
  beforeAll(async () => {
    house = await openHouse({ https });
  });
  afterAll(async () => {
    await closeServer(house.http);
    await house.server.close();
  });

  test('then the one-time link makes the first admin, who signs in, stays signed in and writes', async () => {
    const { server, base } = house;
    await server.deps.db('sessions').delete();
    await server.deps.db('people').delete();
    const link = (await createFirstAdminLink(server.deps, base)) ?? '';
    expect(link.startsWith(`${base}/first-admin#`)).toBe(true);
    const context = await browser.newContext({ ignoreHTTPSErrors: https, viewport: { width: 1440, height: 900 } });
    const page = await context.newPage();
    const complaints = complaintsOf(page);

    await page.goto(link);
    await settled(page);
    expect(await coloursOf(page)).toBeGreaterThan(20);
    await page.getByLabel('Name').fill('Joss Penn');
    await page.getByLabel('E-mail').fill('joss@millrace.example');
    await page.getByLabel(/^Password/).fill('a mill race in March');
    await page.getByRole('button', { name: 'Make the admin' }).click();
    await page.getByText('Joss Penn').waitFor();
    await page.goto(`${base}/sign-in`);
    await page.getByLabel('E-mail').fill('joss@millrace.example');
    await page.getByLabel('Password', { exact: true }).fill('a mill race in March');
    await page.getByRole('button', { name: 'Sign in' }).click();
    await page.waitForURL(/\/units/);
    await page.getByRole('heading', { level: 1 }).waitFor();
    expect(await coloursOf(page)).toBeGreaterThan(20);

    expect(await sessionCookie(context)).toMatchObject({
      name: https ? '__Host-refettle_session' : 'refettle_session',
      httpOnly: true,
      secure: https,
      sameSite: 'Strict',
      domain: NAME,
      path: '/',
    });
    await page.reload();
    await page.getByRole('heading', { level: 1 }).waitFor();
    expect(page.url()).toContain('/units');
    // A write by cookie, from our own page.
    const status = await page.evaluate(async () => (await fetch('/api/sessions/current', { method: 'DELETE' })).status);
    expect(status).toBe(204);
    expect(await page.evaluate(() => window.isSecureContext)).toBe(https); // where it is false, browsers give no camera
    expect(complaints).toEqual([]);
    await context.close();
  });
});

test('When a buyer on the street scans a tag, then the page stands there, and the shop behind it does not', async () => {
  const server = await startTestServer({ webDir: inject('webDir') });
  await addHeron(server);
  const { tag } = await signedOffUnit(server);
  const http = await listen(publicOnly(server.app), '0.0.0.0', 0);
  const base = `http://${NAME}:${String((http.address() as AddressInfo).port)}`;
  const context = await browser.newContext({ viewport: { width: 390, height: 844 } });
  const page = await context.newPage();
  const complaints = complaintsOf(page);

  await page.goto(`${base}${new URL(tag.url).pathname}`);
  await page.getByText(tag.state.number).first().waitFor();
  await settled(page);
  expect(await coloursOf(page)).toBeGreaterThan(20);
  expect(complaints).toEqual([]);
  for (const path of ['/', '/sign-in', '/units']) expect((await page.goto(`${base}${path}`))?.status()).toBe(404);
  await context.close();
  await closeServer(http);
  await server.close();
});
