import type { Page } from 'playwright-core';
import { afterAll, beforeAll, expect, test } from 'vitest';
import {
  accessibilityFaults,
  DESK,
  expectNoSidewaysScroll,
  openShop,
  PHONE,
  RULES_OF_LOOKS,
  settled,
  type BrowserShop,
} from '../helpers/browser.js';
import { addHeron, mendAndProve, newLive, newReading, newRepair, newRun, pass, rulesSeen, takeIn } from '../helpers/factories.js';
import { makeBench, standsAt } from '../helpers/shared-bench.js';

let shop: BrowserShop;
const at: Record<string, string> = {};

/** Every page there is, with something on it: a page that is blank has no faults. */
const SIGNED_IN = [
  'units',
  'board',
  'none found',
  'take in',
  'just taken in',
  'licensed only',
  'repair form',
  'ready to sign',
  'inconclusive',
  'sign-off',
  'tag',
  'withdrawn tag',
  'stock label',
  'price label',
  'capture',
  'bench log',
  'shared benches',
  'not found',
  'no such unit',
] as const;
const ADMIN = ['people', 'link made', 'somebody', 'shut out', 'own page', 'account', 'audit log', 'nothing in the log'] as const;
const PUBLIC = ['sign in', 'first admin', 'one-time link', 'used link', 'look up', 'stands', 'withdrawn', 'not ours'] as const;

beforeAll(async () => {
  shop = await openShop();
  const { server } = shop;
  const { technician, lead } = server.people;
  await addHeron(server);

  const intake = await takeIn(server);
  const fridge = await takeIn(server, { appliance: 'fridge', family: undefined });
  const ready = await takeIn(server);
  await mendAndProve(server, ready.number);
  const signed = await takeIn(server);
  await mendAndProve(server, signed.number);
  const tag = await server.ok('signOff', { params: { number: signed.number }, as: lead, body: await rulesSeen(server, signed.number) });
  const broken = await takeIn(server);
  await mendAndProve(server, broken.number);
  const brokenTag = await server.ok('signOff', {
    params: { number: broken.number },
    as: lead,
    body: await rulesSeen(server, broken.number),
  });
  pass(server, 1);
  await server.ok('recordReading', { params: { number: broken.number }, as: technician, body: newReading(server, 'insulation', 0.62) });
  const unsure = await takeIn(server);
  // 179.5 Ω is inside 180 Ω by less than U (0.5 % of the reading and 3 digits of 0.1 Ω, doubled over √3): inconclusive.
  const find = newRun(server, 'h6-find', { values: { 'drain-pump-winding': 179.5 } });
  pass(server, find.steps.length + 1);
  await server.ok('recordRun', { params: { number: unsure.number }, as: technician, body: find });
  await server.ok('recordRepair', {
    params: { number: unsure.number },
    as: technician,
    body: newRepair(server, { part: 'Pump filter', partSource: { kind: 'none' } }),
  });
  const capture = find.steps.find((step) => step.kind === 'capture');

  await standsAt(server, await makeBench(server), technician);
  await makeBench(server);

  await server.ok('tellLive', { as: technician, body: newLive(intake.number) });

  const invited = await server.ok('invitePerson', {
    as: server.people.admin,
    body: { email: 'tamsin@millrace.example', name: 'Tamsin Oake', role: 'lead' },
  });
  await server.ok('deactivatePerson', {
    as: server.people.admin,
    params: { id: server.people.sales.id },
    body: { reason: 'works elsewhere now' },
  });

  Object.assign(at, {
    units: '/units',
    board: '/board',
    'none found': '/units?find=nothing-like-this',
    'take in': '/units/new',
    'just taken in': `/units/${intake.number}`,
    'licensed only': `/units/${fridge.number}`,
    'repair form': `/units/${ready.number}?do=repair`,
    'ready to sign': `/units/${ready.number}`,
    inconclusive: `/units/${unsure.number}`,
    'sign-off': `/units/${ready.number}/sign-off`,
    tag: `/units/${signed.number}/tag`,
    'withdrawn tag': `/units/${broken.number}/tag`,
    'stock label': `/units/${signed.number}/labels?kind=stock`,
    'price label': `/units/${intake.number}/labels?kind=price`,
    capture: `/captures/${capture?.captureId ?? ''}`,
    'bench log': `/runs/${find.id}`,
    'shared benches': '/benches',
    people: '/people',
    'link made': `/people/${invited.person.id}`,
    somebody: `/people/${technician.id}`,
    'shut out': `/people/${server.people.sales.id}`,
    'own page': `/people/${server.people.admin.id}`,
    account: '/account',
    'audit log': '/audit?subject=tag',
    'nothing in the log': '/audit?who=nobody+at+all',
    'one-time link': new URL(invited.link.url).pathname + new URL(invited.link.url).hash,
    'used link': '/link#used',
    'not found': '/no/such/page',
    'no such unit': '/units/99999',
    'sign in': '/sign-in',
    'first admin': '/first-admin#any',
    'look up': '/t',
    stands: new URL(tag.url).pathname,
    withdrawn: new URL(brokenTag.url).pathname,
    'not ours': `/t/${tag.content.tag}?word=0000`,
  });
});
afterAll(() => shop.close());

/** A page that is always there at once, for whoever is signed in and for nobody. What has another heading has come after it. */
const BETWEEN = {
  somebody: { path: '/no/such/page', heading: 'There is no such page' },
  nobody: { path: '/link', heading: 'A link is missing' },
};

/** Moves as a link of the page does, without loading the document anew. */
const moveTo = (page: Page, path: string): Promise<void> =>
  page.evaluate((to) => {
    history.pushState({ idx: history.length, key: `moved ${history.length} ${performance.now()}`, usr: null }, '', to);
    dispatchEvent(new PopStateEvent('popstate', { state: history.state as unknown }));
    scrollTo(0, 0);
  }, path);

async function look(page: Page, name: string, as: 'somebody' | 'nobody' = 'somebody'): Promise<void> {
  const { path, heading } = BETWEEN[as];
  const between = page.getByRole('heading', { level: 1, name: heading });
  if (page.url() === 'about:blank') await page.goto(path);
  else await moveTo(page, path);
  await between.waitFor();
  const to = at[name] ?? '';
  if (to === path) return;
  await moveTo(page, to);
  await between.waitFor({ state: 'detached' });
  await page.getByRole('heading', { level: 1 }).waitFor();
  // Some have their heading before what they fetch.
  await settled(page);
}

// Colours differ by theme, layout by width: two looks at each page see all four.
const LOOKS = [
  { bench: 'by day at the desk', night: false, viewport: DESK, rules: undefined },
  { bench: 'at night on a phone', night: true, viewport: PHONE, rules: RULES_OF_LOOKS },
];

test.each([
  { who: 'a lead', pages: SIGNED_IN },
  { who: 'an admin', pages: ADMIN },
  { who: 'nobody', pages: PUBLIC },
])(
  'When $who opens each page, at the desk and on a phone, then axe finds nothing, nothing is wider than the window, and the console stays empty',
  async ({ who, pages }) => {
    const faults = await Promise.all(
      LOOKS.map(async ({ bench, night, viewport, rules }) => {
        const { lead, admin } = shop.server.people;
        const as = who === 'nobody' ? undefined : who === 'an admin' ? admin : lead;
        const { page, complaints } = await shop.open(as, { night, viewport });
        const found: string[] = [];
        for (const name of pages) {
          await look(page, name, who === 'nobody' ? 'nobody' : 'somebody');
          expect(await page.evaluate(() => document.documentElement.dataset['theme'])).toBe(night ? 'night' : 'day');
          await expectNoSidewaysScroll(page);
          found.push(...(await accessibilityFaults(page, rules)).map((fault) => `${name}, ${bench}: ${fault}`));
        }
        return [...found, ...complaints];
      }),
    );
    expect(faults.flat()).toEqual([]);
  },
);

test('When a target stands alone, then it is at least 44 px high on a phone', async () => {
  const { page } = await shop.open(shop.server.people.lead, { night: true, viewport: PHONE });
  const small: string[] = [];
  for (const name of ['units', 'take in', 'inconclusive', 'tag'] as const) {
    await look(page, name);
    // Links in a sentence or in a line of a table of steps are excepted (WCAG 2.2, 2.5.8, inline).
    const found = await page.evaluate(() =>
      [...document.querySelectorAll('button, .button, .tap, .field, .word-tabs a, summary, .units-number a')].flatMap((element) => {
        const { height, width } = element.getBoundingClientRect();
        return width > 0 && height < 44 ? [`${element.textContent?.trim() ?? ''} ${Math.round(height)}`] : [];
      }),
    );
    small.push(...found.map((one) => `${name}: ${one}`));
  }
  expect(small).toEqual([]);
});
