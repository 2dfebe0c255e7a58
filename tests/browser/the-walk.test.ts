import jsQR from 'jsqr';
import { PNG } from 'pngjs';
import type { Page } from 'playwright-core';
import { afterAll, beforeAll, expect, test } from 'vitest';
import { openShop, type BrowserShop } from '../helpers/browser.js';
import { addHeron, mendAndProve, newReading } from '../helpers/factories.js';

let shop: BrowserShop;
beforeAll(async () => {
  shop = await openShop();
  await addHeron(shop.server);
});
afterAll(() => shop.close());

async function takeIn(page: Page): Promise<number> {
  await page.goto('/units');
  await page.getByText('No unit is on the books yet').waitFor();
  await page.getByRole('link', { name: 'Take in a unit' }).click();
  await page.getByLabel('Maker').fill('Brindle');
  await page.getByLabel('Model').fill('BW 714');
  await page.getByLabel('Serial number').fill('7143 0968 2251');
  await page.getByLabel('Volts').fill('230');
  await page.getByLabel('Mass in kg').fill('68');
  await page.getByLabel('Complaint').fill('Stands full of water, lamps blink');
  await page.getByLabel('Control family').selectOption('heron-h6');
  await page.getByLabel('What it cost').fill('12.50');
  await page.getByRole('button', { name: 'Take it in' }).click();
  await page.waitForURL(/\/units\/\d{4,}$/);
  return Number(new URL(page.url()).pathname.split('/').at(-1));
}

async function scan(page: Page): Promise<string> {
  const code = page.getByRole('img', { name: /QR code/ }).first();
  await code.waitFor();
  const picture = PNG.sync.read(await code.screenshot());
  const found = jsQR.default(new Uint8ClampedArray(picture.data), picture.width, picture.height);
  if (!found) throw new Error('no QR code can be read off the tag');
  return found.data;
}

test('When a unit goes from the gate to the tag and a later check fails, then the tag stands until then and is withdrawn after it', async () => {
  const { technician, lead } = shop.server.people;
  const bench = await shop.open(technician);
  const number = await takeIn(bench.page);
  await bench.page.getByRole('heading', { name: `No. ${String(number).padStart(4, '0')}` }).waitFor();
  expect(await bench.page.getByText('paid £12.50').count()).toBe(1);
  await bench.page.getByText('Don’t put it on mains.').waitFor();

  await mendAndProve(shop.server, number);
  await bench.page.reload();
  await bench.page.getByText('4 of 5').first().waitFor();
  expect(await bench.page.getByRole('link', { name: 'Bench run h6-prove' }).count()).toBe(1);
  // Found before the mend: the lamp face of G5K3, whose sums are 4 + 1 and 2 + 1 (weights of the sheet's lamps).
  expect(await bench.page.getByRole('img', { name: /Spin lit: Fill and Rinse lit\. Spin dark: Fill and Wash lit\./ }).count()).toBe(1);
  expect(await bench.page.getByRole('link', { name: 'Sign off' }).count()).toBe(0);

  const office = await shop.open(lead);
  await office.page.goto(`/units/${number}`);
  await office.page.getByRole('link', { name: 'Sign off' }).click();
  await office.page.getByRole('heading', { name: 'Every result since it was opened' }).waitFor();
  await office.page.getByRole('button', { name: 'Sign off, the tag stands' }).click();
  await office.page.getByRole('heading', { name: 'This tag stands' }).waitFor();
  const address = await scan(office.page);
  expect(address).toContain(`${shop.baseUrl}/t/${String(number).padStart(4, '0')}-1/`);

  const buyer = await shop.open(undefined, { viewport: { width: 390, height: 844 } });
  await buyer.page.goto(address);
  await buyer.page.getByRole('heading', { name: 'This tag stands' }).waitFor();
  expect(await buyer.page.getByText('7143 0968 2251').count()).toBe(1);
  expect(await buyer.page.getByRole('link', { name: 'Call 01632 960412' }).getAttribute('href')).toBe('tel:01632960412');
  expect(await buyer.page.getByText('certifies no compliance').count()).toBe(1);
  expect(await buyer.page.getByText('SAMPLE').count()).toBe(0);
  expect(await buyer.page.getByRole('navigation').count()).toBe(0);

  // 0.62 MΩ is below the sheet's 1 MΩ by more than U: a fail, which withdraws the tag in the same write.
  await shop.server.ok('recordReading', { params: { number }, as: technician, body: newReading(shop.server, 'insulation', 0.62) });
  await buyer.page.reload();
  await buyer.page.getByRole('heading', { name: 'This tag was withdrawn' }).waitFor();
  await office.page.goto(`/units/${number}`);
  await office.page.getByText('was withdrawn.').waitFor();
  expect(await office.page.getByRole('link', { name: 'Sign off' }).count()).toBe(0);
  expect([...bench.complaints, ...office.complaints, ...buyer.complaints]).toEqual([]);
});

test('When a tag is looked up by a word that is not its own, then nothing on the page looks like a tag', async () => {
  const { page } = await shop.open(undefined);
  await page.goto('/t');
  await page.getByLabel('Tag number').fill('0001-1');
  await page.getByLabel('Word').fill('aaaa');
  await page.getByRole('button', { name: 'Look it up' }).click();
  await page.getByRole('heading', { name: 'This is no tag of ours' }).waitFor();
  expect(await page.getByRole('link', { name: 'Call 01632 960412' }).count()).toBe(1);
  expect(await page.locator('.paper-tag').count()).toBe(0);
});
