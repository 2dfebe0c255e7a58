import { afterAll, beforeAll, expect, test } from 'vitest';
import { DESK, openShop, PHONE, settled, type BrowserShop } from '../helpers/browser.js';
import { benchAlone, givePin, makeBench, standsAt } from '../helpers/shared-bench.js';
import { problemIn } from '../helpers/test-server.js';

let shop: BrowserShop;
beforeAll(async () => {
  shop = await openShop();
});
afterAll(() => shop.close());

test('When no bench is there yet, then the page says so; when a lead makes one, then its token is shown once and lets the bench in', async () => {
  const { page, complaints } = await shop.open(shop.server.people.lead);
  await page.goto('/benches');
  await page.getByText('There is no shared bench yet').waitFor();

  await page.getByRole('button', { name: 'Make a bench' }).click();
  await page.getByText('type a name').waitFor();
  await page.getByLabel('Name of the bench').fill('window bench');
  await page.getByRole('button', { name: 'Make a bench' }).click();
  const token = (await page.getByText(/^bench_[\w-]{43}$/).textContent()) ?? '';
  await page.getByRole('heading', { name: 'window bench' }).waitFor();
  await page.getByText('Has never called').waitFor();
  expect((await shop.server.ok('ownBench', { as: benchAlone({ id: '', name: '', token }) })).bench.name).toBe('window bench');

  await page.getByRole('button', { name: 'I have it, hide it' }).click();
  await page.reload();
  await page.getByText('Last called').waitFor();
  expect(await page.content()).not.toContain(token);

  await page.getByLabel('Name of the bench').fill('Window bench');
  await page.getByRole('button', { name: 'Make a bench' }).click();
  await page.getByText('A bench is called Window bench already.').waitFor();
  expect(complaints).toEqual([]);
});

test('When a bench is revoked on a phone, then it is asked once more, and then the bench is let in no longer; a new token brings it back', async () => {
  const bench = await makeBench(shop.server, 'old bench');
  await standsAt(shop.server, bench, shop.server.people.technician);
  await shop.server.ok('reportRig', {
    as: benchAlone(bench),
    body: { name: 'old rig', instruments: [{ id: 'M-03', kind: 'meter', port: '/dev/ttyUSB1' }] },
  });
  const { page } = await shop.open(shop.server.people.lead, { viewport: PHONE });
  await page.goto('/benches');
  const entry = page.getByRole('article', { name: 'old bench' });
  expect(await entry.textContent()).toMatch(/Wil Tarrow.*old rig.*M-03, meter/s);
  await entry.getByRole('button', { name: 'Revoke old bench' }).click();
  await entry.getByText('nothing more comes from it').waitFor();
  await entry.getByRole('button', { name: 'Revoke old bench' }).click();
  await entry.getByText(/^Revoked/).waitFor();
  expect(problemIn(await shop.server.send('ownBench', { as: benchAlone(bench) })).status).toBe(401);

  await entry.getByRole('button', { name: 'New token for old bench' }).click();
  await entry.getByRole('button', { name: 'Give old bench a new token' }).click();
  await page.getByText('The token of old bench').waitFor();
  await entry.getByText('Last called').waitFor();
});

test('When a lead sets somebody’s PIN, then what is no PIN is refused beside the field, and the list says who set it', async () => {
  const person = await shop.server.addPerson('technician', 'Tamsin Oake');
  const { page } = await shop.open(shop.server.people.lead, { viewport: DESK });
  await page.goto('/benches');
  await settled(page);
  await page.getByRole('button', { name: 'Change the PIN of Tamsin Oake' }).click();
  const field = page.getByLabel('New PIN for Tamsin Oake');
  await field.fill('1234');
  await page.getByRole('button', { name: 'Set the PIN' }).click();
  await page.getByText('too easy to guess').waitFor();
  await field.fill('40719');
  await page.getByRole('button', { name: 'Set the PIN' }).click();
  await page.getByText(/PIN set .* by Maren Holt/).waitFor();
  const bench = await makeBench(shop.server);
  await shop.server.ok('signOnAtBench', { as: benchAlone(bench), body: { person: person.id, pin: '40719' } });

  await page.getByRole('button', { name: 'Change the PIN of Tamsin Oake' }).click();
  await page.getByRole('button', { name: 'Take the PIN away' }).click();
  await page.getByText(/PIN set .* by Maren Holt/).waitFor({ state: 'detached' });
});

test('When a technician opens the page, then it says whose it is', async () => {
  const { page } = await shop.open(shop.server.people.technician);
  await givePin(shop.server, shop.server.people.technician);
  await page.goto('/benches');
  await page.getByText('Leads and admins make benches').waitFor();
  expect(await page.getByRole('link', { name: 'Shared benches' }).count()).toBe(0);
});
