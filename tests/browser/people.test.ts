import { readFileSync } from 'node:fs';
import type { Page } from 'playwright-core';
import { afterAll, beforeAll, expect, test } from 'vitest';
import { audit } from '../../server/history/audit.js';
import { expectNoSidewaysScroll, focused, openShop, PHONE, settled, type BrowserShop } from '../helpers/browser.js';
import { cheapHash } from '../helpers/shared-bench.js';

const PASSWORD = 'eleven brass hinges';
let shop: BrowserShop;
beforeAll(async () => {
  shop = await openShop();
});
afterAll(() => shop.close());

/** Tabs until a field or a button has the focus; the order is the page's own. */
async function tabTo(page: Page, name: RegExp): Promise<void> {
  for (let presses = 0; presses < 60; presses += 1) {
    if (name.test(await focused(page))) return;
    await page.keyboard.press('Tab');
  }
  throw new Error(`no way to ${String(name)} by the keyboard`);
}

test('When somebody is invited by keyboard alone, sets the password at the link and is deactivated, then they are in, and then out', async () => {
  const { page, complaints } = await shop.open(shop.server.people.admin);
  await page.goto('/people');
  await page.getByRole('link', { name: /Joss Penn \(you\)/ }).waitFor();
  await tabTo(page, /^Invite$/);
  await page.keyboard.press('Enter');
  await page.getByRole('alert').getByText('2 things are missing or wrong.').waitFor();
  await tabTo(page, /^Name$/);
  await page.keyboard.type('Tamsin Oake');
  await tabTo(page, /^E-mail address$/);
  await page.keyboard.type('tamsin@millrace.example');
  await tabTo(page, /^Role$/);
  await page.keyboard.type('lead');
  await tabTo(page, /^Invite$/);
  await page.keyboard.press('Enter');
  const field = page.getByLabel('One-time link');
  const url = await field.inputValue();
  expect(url).toMatch(new RegExp(`^${shop.baseUrl}/link#[\\w-]{43}$`));
  await page.getByRole('cell', { name: /^invited, until/ }).waitFor();
  await page.getByRole('button', { name: 'I have it, hide it' }).click();
  expect(await field.count()).toBe(0);

  // Whoever is invited, on a device of their own.
  const { page: theirs, complaints: theirComplaints } = await shop.open(undefined, { fresh: true, viewport: PHONE });
  await theirs.goto(url);
  await theirs.getByRole('heading', { name: 'Welcome, Tamsin Oake' }).waitFor();
  await expectNoSidewaysScroll(theirs);
  await theirs.getByLabel('Password').fill('short');
  await theirs.getByRole('button', { name: 'Set the password and sign in' }).click();
  await theirs.getByText('Password: at least 12 characters').waitFor();
  await theirs.getByLabel('Password').fill(PASSWORD);
  await theirs.getByRole('button', { name: 'Set the password and sign in' }).click();
  await theirs.waitForURL('**/units');
  await theirs.getByText('No unit is on the books yet.').waitFor();
  expect(theirs.url()).not.toContain('#');

  const { page: again } = await shop.open(undefined, { fresh: true });
  await again.goto(url);
  await again.getByRole('heading', { name: 'This link no longer opens' }).waitFor();

  await page.reload();
  await page.getByRole('link', { name: 'Tamsin Oake' }).click();
  await page.getByRole('heading', { name: 'Where Tamsin Oake is signed in' }).waitFor();
  await page.getByText(/^\w+ on Linux$/).waitFor();
  await page.getByText('Deactivate Tamsin Oake').click();
  await page.getByRole('button', { name: 'Deactivate', exact: true }).click();
  await page.getByText('say why').waitFor();
  await page.getByLabel('Why').fill('works elsewhere now');
  await page.getByRole('button', { name: 'Deactivate', exact: true }).click();
  await page.getByRole('button', { name: 'Reactivate Tamsin Oake' }).waitFor();
  await page.getByText('Nowhere.', { exact: true }).waitFor();

  await theirs.goto('/account');
  await theirs.getByRole('heading', { name: 'Sign in' }).waitFor();
  await theirs.getByLabel('E-mail address').fill('tamsin@millrace.example');
  await theirs.getByLabel('Password').fill(PASSWORD);
  await theirs.getByRole('button', { name: 'Sign in' }).click();
  await theirs.getByText('The e-mail address or the password is wrong.').waitFor();
  expect([...complaints, ...theirComplaints]).toEqual([]);
});

test('When a role is changed and a link is made for a forgotten password, then the page says what happened, and nobody changes their own', async () => {
  const someone = await shop.server.addPerson('technician', 'Risen Quickly');
  const { page, complaints } = await shop.open(shop.server.people.admin);
  await page.goto(`/people/${someone.id}`);
  await page.getByLabel('Role', { exact: true }).selectOption('lead');
  await page.getByRole('button', { name: 'Change the role' }).click();
  await page.getByText(/^lead, active/).waitFor();
  await page.getByRole('button', { name: 'Make a link for a new password' }).click();
  expect(await page.getByLabel('One-time link').inputValue()).toMatch(/\/link#[\w-]{43}$/);

  await page.goto(`/people/${shop.server.people.admin.id}`);
  await page.getByText('Another admin changes your role').waitFor();
  expect(await page.getByLabel('Role', { exact: true }).count()).toBe(0);
  await page.getByText('Deactivate Joss Penn').click();
  await page.getByLabel('Why').fill('a long holiday');
  await page.getByRole('button', { name: 'Deactivate', exact: true }).click();
  await page.getByText('Make somebody else an admin first.').waitFor();
  expect(complaints).toEqual([]);
});

test('When somebody changes their password and ends a session, then the others have ended and this one goes on', async () => {
  const me = await shop.server.addPerson('sales', 'Own Account');
  await shop.server.deps
    .db('people')
    .where({ id: me.id })
    .update({ password_hash: await cheapHash(PASSWORD) });
  const { token } = await shop.server.ok('signIn', { body: { email: me.email, password: PASSWORD } });
  const { page, complaints } = await shop.open({ ...me, token: token ?? '' });
  await page.goto('/units');
  await page.getByRole('link', { name: /^Your account, Own Account/ }).click();
  await page.getByRole('heading', { name: 'Your account' }).waitFor();
  await page.getByText(', this one').waitFor();
  // The session that the person was made with.
  await page.getByRole('button', { name: 'End the session from unknown' }).click();
  await page.getByRole('button', { name: 'End the session from unknown' }).waitFor({ state: 'detached' });

  await page.getByLabel('Old password').fill('not the password');
  await page.getByLabel('New password').fill('twelve brass hinges');
  await page.getByRole('button', { name: 'Change my password' }).click();
  await page.getByText('Old password: is not your password').waitFor();
  await page.getByLabel('Old password').fill(PASSWORD);
  await page.getByRole('button', { name: 'Change my password' }).click();
  await page.getByText('Changed. 0 other sessions of yours ended.').waitFor();
  expect((await shop.server.send('signIn', { body: { email: me.email, password: 'twelve brass hinges' } })).status).toBe(201);
  expect(complaints).toEqual([]);
});

test('When the log is filtered, then the filter stands in the address, a link to it shows the same, and the export holds just that', async () => {
  const { admin } = shop.server.people;
  await audit(shop.server.deps.db, {
    who: { id: admin.id, name: admin.name, role: 'admin' },
    what: 'person.role-changed',
    subject: { kind: 'person', id: 'x', name: 'Odile Finch' },
    before: { role: 'technician' },
    after: { role: 'sales' },
    at: shop.server.time.now,
  });
  const { page, complaints } = await shop.open(admin);
  await page.goto('/audit');
  await page.getByLabel('What', { exact: true }).selectOption('person.role-changed');
  await page.getByLabel('To what').fill('odile');
  await page.getByRole('button', { name: 'Filter' }).click();
  await page.waitForURL('**/audit?what=person.role-changed&subject=odile');
  const entry = page.getByRole('listitem').filter({ hasText: 'Odile Finch' });
  await entry.getByText('before: technician').waitFor();
  expect(await entry.innerText()).toContain('Joss Penn changed a role: Odile Finch');
  expect(await page.getByRole('listitem').filter({ hasText: 'changed a role' }).count()).toBe(1);

  await page.reload();
  await entry.waitFor();
  expect(await page.getByLabel('To what').inputValue()).toBe('odile');
  const [download] = await Promise.all([page.waitForEvent('download'), page.getByRole('link', { name: 'These as CSV' }).click()]);
  expect(download.suggestedFilename()).toMatch(/^refettle-audit-\d{4}-\d\d-\d\d\.csv$/);
  const lines = readFileSync(await download.path(), 'utf8')
    .trim()
    .split('\r\n');
  expect(lines).toHaveLength(2);
  expect(lines[1]).toContain('Odile Finch');

  await page.goto('/audit?who=nobody+at+all');
  await page.getByText('Nothing like that is in the log.').waitFor();
  expect(complaints).toEqual([]);
});

test('When a technician looks for people or the log, then the menu has neither, and the pages say whose they are', async () => {
  const { page } = await shop.open(shop.server.people.technician);
  await page.goto('/people');
  await page.getByText('Admins look after people.').waitFor();
  const menu = page.getByRole('navigation', { name: 'Main' });
  expect(await menu.getByRole('link', { name: /People|Audit log/ }).count()).toBe(0);
  await page.goto('/audit');
  await page.getByText('Admins read the audit log.').waitFor();
  await page.goto('/account');
  await page.getByRole('heading', { name: 'PIN for shared benches' }).waitFor();
  await settled(page);
});
