// A shop that a real browser looks at: the whole server in this process, on a free port, with the built web.
import { existsSync, readFileSync } from 'node:fs';
import { createServer, type Server } from 'node:http';
import { createRequire } from 'node:module';
import type { AddressInfo } from 'node:net';
import type { AxeResults } from 'axe-core';
import { chromium, type Browser, type BrowserContext, type Page } from 'playwright-core';
import { expect, inject, onTestFinished } from 'vitest';
import type { Shop } from '../../shared/api/sessions.js';
import { startTestServer, type SignedInPerson, type TestServer } from './test-server.js';

export const DESK = { width: 1440, height: 900 };
export const PHONE = { width: 390, height: 844 };

export interface BrowserShop {
  server: TestServer;
  baseUrl: string;
  /** A page for one test, signed in as somebody or as nobody. What it complains about on its console ends up in `complaints`. */
  open(as: SignedInPerson | undefined, options?: OpenOptions): Promise<OpenPage>;
  close(): Promise<void>;
}

export interface OpenOptions {
  viewport?: { width: number; height: number };
  night?: boolean;
  /** A browser that has never been here: nothing is cached, nothing remembered. */
  fresh?: boolean;
}

export interface OpenPage {
  page: Page;
  context: BrowserContext;
  complaints: string[];
}

export function chromiumPath(): string {
  const found = [
    process.env['CHROMIUM'],
    '/usr/bin/chromium-headless-shell',
    '/usr/bin/chromium',
    '/usr/bin/chromium-browser',
    '/usr/bin/google-chrome',
  ].find((path) => path && existsSync(path));
  if (!found) throw new Error('No Chromium on this machine: apt-get install -y chromium-headless-shell, or set CHROMIUM to its path.');
  return found;
}

/** One for all files of a worker, which share their modules; it ends with the worker. */
let browserHere: Promise<Browser> | undefined;
const launched = (): Promise<Browser> =>
  (browserHere ??= chromium.launch({
    executablePath: chromiumPath(),
    args: [
      '--headless',
      '--no-sandbox',
      '--disable-gpu',
      '--disable-quic',
      '--no-first-run',
      '--disable-background-networking',
      '--disable-component-update',
      '--disable-sync',
    ],
  }));

/** A person's device: a page that is free is taken again, for a new one starts cold and takes a second. */
interface Device {
  context: BrowserContext;
  free: Page[];
}

/** `publicUrl`: where tags point to, if not to this machine. */
export async function openShop(shop: Partial<Shop> = {}, { publicUrl }: { publicUrl?: string } = {}): Promise<BrowserShop> {
  // The address is known before the app is made: tags carry it.
  const http: Server = createServer();
  await new Promise<void>((listening) => http.listen(0, '127.0.0.1', listening));
  const baseUrl = `http://127.0.0.1:${(http.address() as AddressInfo).port}`;
  const server = await startTestServer({ shop, config: { publicUrl: publicUrl ?? baseUrl }, webDir: inject('webDir') });
  // Browsers drop cookies by their own clock.
  server.time.now = new Date();
  http.on('request', server.app);
  const browser = await launched();
  const devices = new Map<string, Device>();
  const contexts: BrowserContext[] = [];
  return {
    server,
    baseUrl,
    async open(as, { viewport = DESK, night = false, fresh = false } = {}) {
      const make = async (): Promise<Device> => {
        const context = await browser.newContext({ baseURL: baseUrl, viewport, colorScheme: night ? 'dark' : 'light' });
        contexts.push(context);
        if (as) await context.addCookies([{ name: 'refettle_session', value: as.token, url: baseUrl, httpOnly: true, sameSite: 'Strict' }]);
        return { context, free: [] };
      };
      const key = JSON.stringify([as?.token, viewport, night]);
      const device = (fresh ? undefined : devices.get(key)) ?? (await make());
      if (!fresh && as) devices.set(key, device);
      const { context, free } = device;
      const page = free.pop() ?? (await context.newPage());
      onTestFinished(async () => {
        if (page.isClosed()) return;
        page.removeAllListeners();
        await page.unrouteAll();
        await page.setViewportSize(viewport);
        await page.goto('about:blank');
        free.push(page);
      });
      const complaints: string[] = [];
      page.on('pageerror', (error) => complaints.push(error.message));
      page.on('console', (message) => {
        // The browser itself logs every refusal of the API; whether one was right is for the test to say.
        if (['error', 'warning'].includes(message.type()) && !message.text().startsWith('Failed to load resource'))
          complaints.push(message.text());
      });
      return { page, context, complaints };
    },
    async close() {
      await Promise.all(contexts.map((context) => context.close()));
      const closed = new Promise((done) => http.close(done));
      http.closeAllConnections();
      await closed;
      await server.close();
    },
  };
}

/** Nothing of the page is still being fetched or drawn. */
export const settled = (page: Page): Promise<void> => page.locator('[aria-busy]').first().waitFor({ state: 'detached' });

// Half the size of the readable one: every page that is looked at reads it anew.
const axeSource = readFileSync(createRequire(import.meta.url).resolve('axe-core/axe.min.js'), 'utf8');

/** Rules whose answer hangs on colours and sizes: the same page can keep them in one theme or width and break them in another. */
export const RULES_OF_LOOKS = [
  'color-contrast',
  'link-in-text-block',
  'target-size',
  'scrollable-region-focusable',
  'css-orientation-lock',
];

/** What axe finds on the page as it stands: the ids of the rules that are broken, with where. All rules, or those named. */
export async function accessibilityFaults(page: Page, rules?: readonly string[]): Promise<string[]> {
  // CSP refuses a script tag; evaluate() is not subject to it. Once a document: to read it takes longer than most pages take to look at.
  if (!(await page.evaluate(() => 'axe' in window))) await page.evaluate(axeSource);
  const { violations } = await page.evaluate(
    (only) =>
      (window as unknown as { axe: { run(options: object): Promise<AxeResults> } }).axe.run({
        resultTypes: ['violations'],
        preload: false,
        ...(only ? { runOnly: only } : {}),
      }),
    rules,
  );
  return violations.map(
    (violation) => `${violation.id} (${String(violation.impact)}): ${violation.nodes.map((node) => node.target.join(' ')).join(', ')}`,
  );
}

/** The page is not wider than its window: nothing to scroll sideways but regions made for it. */
export async function expectNoSidewaysScroll(page: Page): Promise<void> {
  const { content, shown } = await page.evaluate(() => ({ content: document.documentElement.scrollWidth, shown: window.innerWidth }));
  expect(content).toBeLessThanOrEqual(shown);
}

/** The accessible name of what has the focus, roughly: its label or its text. */
export const focused = (page: Page): Promise<string> =>
  page.evaluate(() => {
    const element = document.activeElement;
    if (element instanceof HTMLInputElement || element instanceof HTMLTextAreaElement || element instanceof HTMLSelectElement)
      return element.labels?.[0]?.textContent?.trim() ?? '';
    return element?.textContent?.trim() ?? '';
  });
