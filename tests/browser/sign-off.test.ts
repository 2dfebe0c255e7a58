import { afterAll, beforeAll, expect, test } from 'vitest';
import { openShop, type BrowserShop } from '../helpers/browser.js';
import { addHeron, mendAndProve, newReading, takeIn } from '../helpers/factories.js';

let shop: BrowserShop;
beforeAll(async () => {
  shop = await openShop();
  await addHeron(shop.server);
});
afterAll(() => shop.close());

test('When the rules change while a lead reads, then signing is refused and the page says what changed', async () => {
  const { people } = shop.server;
  const { number } = await takeIn(shop.server);
  await mendAndProve(shop.server, number);
  const { page } = await shop.open(people.lead);
  await page.goto(`/units/${number}/sign-off`);
  const button = page.getByRole('button', { name: 'Sign off, the tag stands' });
  await button.waitFor();
  await shop.server.ok('recordReading', { params: { number }, as: people.technician, body: newReading(shop.server, 'insulation', 0.62) });
  await button.click();
  const alert = page.getByRole('alert');
  await alert.getByText(/The rules have changed since you looked: Electrical safety test is now fail/).waitFor();
  await alert.getByText('Electrical safety test: Insulation: fail').waitFor();
  await page.getByText('Not every rule is met yet.').waitFor();
  expect(await button.count()).toBe(0);
});

test('When a lead worked on the unit, then the page explains four eyes and offers nothing to press', async () => {
  const { people, otherLead } = shop.server;
  const { number } = await takeIn(shop.server);
  await mendAndProve(shop.server, number, { as: people.lead });
  const { page } = await shop.open(people.lead);
  await page.goto(`/units/${number}/sign-off`);
  await page.getByText('You worked on this unit yourself.').waitFor();
  expect(await page.getByRole('button', { name: 'Sign off, the tag stands' }).count()).toBe(0);

  const other = await shop.open(otherLead);
  await other.page.goto(`/units/${number}/sign-off`);
  await other.page.getByRole('button', { name: 'Sign off, the tag stands' }).click();
  await other.page.getByRole('heading', { name: 'This tag stands' }).waitFor();
});

test('When a reading was taken before the repair, then the sign-off still shows it, as one that no longer counts', async () => {
  const { people } = shop.server;
  const { number } = await takeIn(shop.server);
  const call = { params: { number }, as: people.technician };
  // 96.8 Ω lies far below the sheet's 140 to 180 Ω.
  await shop.server.ok('recordReading', { ...call, body: newReading(shop.server, 'drain-pump-winding', 96.8) });
  await mendAndProve(shop.server, number);
  const { page } = await shop.open(people.lead);
  await page.goto(`/units/${number}/sign-off`);
  const row = page.getByRole('listitem').filter({ hasText: '96.8 Ω' });
  await row.waitFor();
  expect(await row.innerText()).toMatch(/fail[\s\S]*no longer counts/);
});

test('When a lead withdraws a standing tag with a reason, then its page says so', async () => {
  const { people } = shop.server;
  const { number } = await takeIn(shop.server);
  await mendAndProve(shop.server, number);
  const { page } = await shop.open(people.lead);
  await page.goto(`/units/${number}/sign-off`);
  await page.getByRole('button', { name: 'Sign off, the tag stands' }).click();
  await page.getByText('Withdraw this tag').click();
  await page.getByRole('button', { name: 'Withdraw the tag' }).click();
  await page.getByText('say why, for the tag’s page').waitFor();
  await page.getByLabel('Why it no longer stands').fill('the door seal leaks');
  await page.getByRole('button', { name: 'Withdraw the tag' }).click();
  await page.getByRole('heading', { name: 'This tag was withdrawn' }).waitFor();
  await page.getByText('the door seal leaks').waitFor();
});
