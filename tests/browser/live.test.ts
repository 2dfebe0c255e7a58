import { v4 as anyId } from 'uuid';
import type { Page } from 'playwright-core';
import { afterAll, beforeAll, expect, test } from 'vitest';
import type { LiveMessage } from '../../shared/api/live.js';
import { lampFace } from '../../shared/lamps/face.js';
import { readSheet } from '../../shared/sheet/read-sheet.js';
import { accessibilityFaults, expectNoSidewaysScroll, openShop, PHONE, type BrowserShop } from '../helpers/browser.js';
import { addHeron, newLive, newReading, shopFileText, takeIn } from '../helpers/factories.js';

let shop: BrowserShop;
let unit: number;
beforeAll(async () => {
  shop = await openShop();
  await addHeron(shop.server);
  unit = (await takeIn(shop.server)).number;
});
afterAll(() => shop.close());

const sheet = readSheet(shopFileText('heron-h6.yaml'));
const at = '2026-03-05T09:00:00.000Z';

/** A bench that tells its work on a unit. */
function bench(number = unit) {
  const ids = { sitting: anyId(), work: anyId() };
  let part = 0;
  return (...messages: LiveMessage[]) =>
    shop.server.ok('tellLive', { as: shop.server.people.technician, body: { ...ids, part: part++, unit: number, messages } });
}
const began = (rig: string): LiveMessage => {
  const message = newLive(unit).messages[0] as Extract<LiveMessage, { kind: 'began' }>;
  return { ...message, rig: { name: rig, simulated: false } };
};
const captureBegan = (): LiveMessage => ({
  kind: 'capture began',
  at,
  captureId: anyId(),
  byKeys: false,
  lamps: sheet.lamps.map(({ id, label, colour }) => ({ id, label, colour })),
  seconds: 60,
});
/** So many rows of twenty a second, the spin lamp lit in every other second. */
const rows = (fromMs: number, count: number): LiveMessage => ({
  kind: 'lamps',
  rows: Array.from({ length: count }, (_, row) => {
    const ms = fromMs + row * 50;
    return [ms, 60, 5, 55, 5, Math.floor(ms / 1000) % 2 === 0 ? 70 : 4, 3];
  }),
});
const code = (): LiveMessage => ({
  kind: 'code so far',
  shows: 'code',
  code: 'G5K3',
  title: 'Drain pump: winding open or shorted',
  repeats: 4,
  confidence: 0.9998,
  face: lampFace('G5K3', sheet),
  thresholds: sheet.lamps.map(() => 30),
});
const lit = (page: Page, lamp: string) => page.locator(`[data-lamp="${lamp}"]`).getAttribute('data-lit');

test('When a run goes on at a bench, then the board shows who, what, the step, its lamps, the code so far and the last verdict, as they come', async () => {
  const { page, complaints } = await shop.open(shop.server.people.sales);
  await page.goto('/board');
  await page.getByText('Nothing goes on at any bench.').waitFor();
  const tell = bench();
  await tell(began('bench 2'));
  await page.getByRole('heading', { name: 'bench 2, Wil Tarrow' }).waitFor();
  await tell({ kind: 'step began', at, index: 0 });
  await page.getByText('Step 1 of 2: Drain pump winding').waitFor();
  await tell({ kind: 'step ended', at, index: 0, verdict: 'fail', told: '97.2 Ω ±0.8, 140 to 180 Ω' });
  await page.getByText('97.2 Ω ±0.8, 140 to 180 Ω').waitFor();
  await tell({ kind: 'step began', at, index: 1 }, captureBegan());
  for (let second = 0; second < 20; second += 2) await tell(rows(second * 1000, 40));
  await tell(code());
  await page.getByText('G5K3').waitFor();
  expect(await page.getByText('4 times, confidence 0.9998').count()).toBe(1);
  expect(await lit(page, 'fill')).toBe('true');
  expect(await lit(page, 'spin')).toBe('false');
  await tell(rows(20_000, 5));
  await page.locator('[data-lamp="spin"][data-lit="true"]').waitFor();
  // Read out are the step and the verdict, not the lamps (WCAG 4.1.3 asks for status messages; a lamp each tenth of a second would drown them).
  const live = page.locator('[aria-live="polite"]');
  expect(await live.innerText()).toMatch(/Step 2 of 2[\s\S]*97\.2 Ω[\s\S]*fail/);
  expect(await live.locator('[data-lamp]').count()).toBe(0);
  expect(await accessibilityFaults(page)).toEqual([]);
  await page.setViewportSize(PHONE);
  await expectNoSidewaysScroll(page);
  expect(await accessibilityFaults(page)).toEqual([]);
  await tell({ kind: 'capture ended', at, how: 'done' }, { kind: 'ended', at, how: 'ended', verdict: 'fail' });
  await page.getByText(/^Ended/).waitFor();
  expect(await page.locator('[data-lamp]').count()).toBe(0);
  expect(complaints).toEqual([]);
});

test('When a lamp flashes faster than three times a second, then it is drawn lit, with the word', async () => {
  const { page } = await shop.open(shop.server.people.lead);
  await page.goto('/board');
  const tell = bench();
  await tell(began('bench 3'), { kind: 'step began', at, index: 1 }, captureBegan());
  // Five flashes a second: lit for two rows of a twentieth, dark for two.
  const flashing: LiveMessage = {
    kind: 'lamps',
    rows: Array.from({ length: 40 }, (_, row) => [row * 50, 5, 5, 5, 5, row % 4 < 2 ? 80 : 3, 3]),
  };
  await tell(flashing);
  await page.getByText('fast').waitFor();
  expect(await lit(page, 'spin')).toBe('true');
  await tell({ kind: 'ended', at, how: 'parked' });
  await page.getByText(/^Parked/).waitFor();
});

test('When somebody opens the unit’s page in the middle of a run, then the run stands there as it is and goes on, at night on a phone, too', async () => {
  const tell = bench();
  await tell(began('bench 4'), { kind: 'step ended', at, index: 0, verdict: 'pass', told: '161.0 Ω' });
  await tell({ kind: 'step began', at, index: 1 }, captureBegan(), rows(0, 40), code());
  const { page } = await shop.open(shop.server.people.lead, { viewport: PHONE, night: true });
  await page.goto(`/units/${unit}`);
  await page.getByRole('heading', { name: 'Going on now' }).waitFor();
  await page.getByText('Step 2 of 2: Read the codes').waitFor();
  expect(await page.getByText('161.0 Ω').count()).toBe(1);
  expect(await lit(page, 'spin')).toBe('false');
  await tell(rows(2000, 3));
  await page.locator('[data-lamp="spin"][data-lit="true"]').waitFor();
  expect(await accessibilityFaults(page)).toEqual([]);
  await expectNoSidewaysScroll(page);
  await tell({ kind: 'ended', at, how: 'ended', verdict: 'pass' });
  await page.getByRole('heading', { name: 'Just ended' }).waitFor();
});

test('When something is recorded while the live connection stands, then the page asks once for it and not by the clock', async () => {
  const number = (await takeIn(shop.server)).number;
  const { page } = await shop.open(shop.server.people.lead);
  let asked = 0;
  page.on('request', (request) => (asked += request.url().endsWith(`/api/units/${number}`) ? 1 : 0));
  await page.goto(`/units/${String(number).padStart(4, '0')}`);
  await page.getByRole('heading', { name: 'What happened, newest first' }).waitFor();
  // The connection stands.
  await page.getByRole('heading', { name: 'At no bench now' }).waitFor();
  const before = asked;
  await shop.server.ok('recordReading', { params: { number }, as: shop.server.people.technician, body: newReading(shop.server, 'heater') });
  await page.getByRole('button', { name: '1 new' }).waitFor();
  expect(asked - before).toBe(1);
});

test('When the session ends while the board is open, then it leads to the sign-in page', async () => {
  const person = await shop.server.addPerson('sales', 'Bram Quill');
  const { page } = await shop.open(person);
  await page.goto('/board');
  await page.getByRole('heading', { name: 'Going on', exact: true }).waitFor();
  await shop.server.ok('signOut', { as: person });
  await page.waitForURL(/\/sign-in/);
});
