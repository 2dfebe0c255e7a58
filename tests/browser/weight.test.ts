import { gzipSync } from 'node:zlib';
import type { Request } from 'playwright-core';
import { afterAll, beforeAll, expect, test } from 'vitest';
import { openShop, PHONE, settled, type BrowserShop } from '../helpers/browser.js';
import { addHeron, takeIn } from '../helpers/factories.js';

let shop: BrowserShop;
beforeAll(async () => {
  shop = await openShop();
  await addHeron(shop.server);
});
afterAll(() => shop.close());

/** What a phone on a slow line fetches before it shows the first page: this shop's own limit, no published source. */
const FIRST_SCRIPT_BYTES_AT_MOST = 170 * 1024;

async function weightOf(request: Request): Promise<number> {
  const response = await request.response();
  return response ? gzipSync(await response.body()).length : 0;
}

test('When a page is the first that is opened, then its scripts are at most 170 kB, compressed', async () => {
  const { number } = await takeIn(shop.server);
  const heavy: string[] = [];
  for (const path of ['/sign-in', '/units', `/units/${number}`, '/t/0001-1?word=AAAA']) {
    const { page, context } = await shop.open(path === '/sign-in' ? undefined : shop.server.people.technician, {
      viewport: PHONE,
      fresh: true,
    });
    const scripts: Promise<number>[] = [];
    page.on('requestfinished', (request) => {
      if (request.url().endsWith('.js')) scripts.push(weightOf(request));
    });
    await page.goto(path);
    await page.getByRole('heading', { level: 1 }).waitFor();
    await settled(page);
    const bytes = (await Promise.all(scripts)).reduce((sum, one) => sum + one, 0);
    expect(bytes).toBeGreaterThan(0);
    if (bytes > FIRST_SCRIPT_BYTES_AT_MOST) heavy.push(`${path}: ${bytes} bytes`);
    await context.close();
  }
  expect(heavy).toEqual([]);
});
