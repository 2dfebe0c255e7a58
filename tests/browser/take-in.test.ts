import type { Page } from 'playwright-core';
import { afterAll, beforeAll, beforeEach, expect, test } from 'vitest';
import { hashPassword } from '../../server/auth/password.js';
import { insertPerson } from '../../server/auth/people-store.js';
import { v7 as newId } from 'uuid';
import { focused, openShop, type BrowserShop } from '../helpers/browser.js';
import { addHeron, takeIn } from '../helpers/factories.js';

const PASSWORD = 'eleven brass hinges';
const EMAIL = 'tamsin@millrace.example';

let shop: BrowserShop;
let page: Page;
beforeAll(async () => {
  shop = await openShop();
  await addHeron(shop.server);
  await insertPerson(shop.server.deps.db, {
    id: newId(),
    name: 'Tamsin Oake',
    email: EMAIL,
    role: 'technician',
    passwordHash: await hashPassword(PASSWORD),
    createdAt: shop.server.time.now,
  });
});
afterAll(() => shop.close());
beforeEach(async () => {
  ({ page } = await shop.open(shop.server.people.technician));
});

/** Tabs until a field or a button has the focus; the order is the page's own. */
async function tabTo(onto: Page, name: string): Promise<void> {
  for (let presses = 0; presses < 60; presses += 1) {
    if ((await focused(onto)) === name) return;
    await onto.keyboard.press('Tab');
  }
  throw new Error(`no way to ${name} by the keyboard`);
}

const unitsWith = async (find: string): Promise<number> =>
  (await shop.server.ok('listUnits', { as: shop.server.people.lead, query: { find } })).items.length;

test('When nobody is signed in and only the keyboard is used, then sign-in leads back to the page asked for, and a unit is taken in', async () => {
  const { page: fresh, complaints } = await shop.open(undefined);
  await fresh.goto('/units/new');
  await fresh.getByRole('heading', { name: 'Sign in' }).waitFor();
  await tabTo(fresh, 'E-mail address');
  await fresh.keyboard.type(EMAIL);
  await tabTo(fresh, 'Password');
  await fresh.keyboard.type('not the password');
  await fresh.keyboard.press('Enter');
  await fresh.getByRole('alert').waitFor();
  await tabTo(fresh, 'Password');
  await fresh.keyboard.press('Control+A');
  await fresh.keyboard.type(PASSWORD);
  await fresh.keyboard.press('Enter');

  await fresh.getByRole('heading', { name: 'Take in a unit' }).waitFor();
  expect(new URL(fresh.url()).pathname).toBe('/units/new');
  for (const [name, text] of [
    ['Maker', 'Oakhithe'],
    ['Model', 'OD 45'],
    ['Serial number', 'KEYS 1'],
    ['Complaint', 'Does not heat'],
  ] as const) {
    await tabTo(fresh, name);
    await fresh.keyboard.type(text);
  }
  await tabTo(fresh, 'Take it in');
  await fresh.keyboard.press('Enter');
  await fresh.waitForURL(/\/units\/\d{4,}$/);
  await fresh.getByRole('heading', { name: /^No\. / }).waitFor();
  expect(await focused(fresh)).toMatch(/^No\. \d{4}$/);
  expect(await unitsWith('KEYS 1')).toBe(1);
  expect(complaints).toEqual([]);
});

test('When a form is sent half-filled, then the summary takes the focus and each fault leads to its field', async () => {
  await page.goto('/units/new');
  await page.getByRole('button', { name: 'Take it in' }).click();
  const summary = page.getByRole('alert');
  await summary.getByText('3 things are missing or wrong.').waitFor();
  expect(await focused(page)).toContain('3 things are missing or wrong.');
  await summary.getByRole('link', { name: /^Complaint/ }).click();
  expect(await focused(page)).toBe('Complaint');
  expect(await page.getByLabel('Maker').getAttribute('aria-invalid')).toBe('true');
});

test('When the serial number is on the books, then the page warns, links the unit, asks for a reason, and links both', async () => {
  const first = await takeIn(shop.server, { plate: { maker: 'Brindle', model: 'BW 508', serial: 'TWICE 1', protectionClass: 'I' } });
  await page.goto('/units/new');
  await page.getByLabel('Maker').fill('Brindle');
  await page.getByLabel('Model').fill('BW 508');
  await page.getByLabel('Serial number').fill('TWICE 1');
  await page.getByLabel('Complaint').fill('Came back by another door');
  await page.getByRole('button', { name: 'Take it in' }).click();
  await page.getByRole('heading', { name: 'This serial number is on the books already' }).waitFor();
  const number = `No. ${String(first.number).padStart(4, '0')}`;
  expect(await page.getByRole('link', { name: number }).getAttribute('href')).toBe(`/units/${String(first.number).padStart(4, '0')}`);
  expect(await unitsWith('TWICE 1')).toBe(1);
  await page.getByLabel('Why it is taken in again').selectOption('bought back');
  await page.getByRole('button', { name: 'Take it in again' }).click();
  await page.waitForURL(/\/units\/\d{4,}$/);
  await page.getByText(': bought back.').waitFor();
  expect(await unitsWith('TWICE 1')).toBe(2);
});

test('When the answer to a submission is lost and the button is pressed again, then one unit is stored', async () => {
  let lost = false;
  await page.route('**/api/units', async (route) => {
    if (lost || route.request().method() !== 'POST') return route.continue();
    lost = true;
    await route.fetch();
    await route.abort();
  });
  await page.goto('/units/new');
  await page.getByLabel('Maker').fill('Tarnwell');
  await page.getByLabel('Model').fill('TD 60');
  await page.getByLabel('Serial number').fill('ONCE 1');
  await page.getByLabel('Complaint').fill('Does not turn');
  await page.getByRole('button', { name: 'Take it in' }).click();
  await page.getByRole('alert').getByText('The server does not answer.').waitFor();
  await page.getByRole('button', { name: 'Take it in' }).click();
  await page.waitForURL(/\/units\/\d{4,}$/);
  expect(lost).toBe(true);
  expect(await unitsWith('ONCE 1')).toBe(1);
});

test('When an appliance is a licensed person’s work, then a caution stands before it is saved', async () => {
  await page.goto('/units/new');
  expect(await page.getByText('a licensed person’s work').count()).toBe(0);
  await page.getByLabel('Appliance').selectOption('microwave oven');
  await page.getByText('a licensed person’s work').waitFor();
});
