import { readFileSync } from 'node:fs';
import type { RunLog } from '../../shared/script/run-log.js';
import { afterAll, beforeAll, expect, test } from 'vitest';
import { openShop, type BrowserShop } from '../helpers/browser.js';
import { captureFile } from '../helpers/bench-log.js';
import { addHeron, newCapture, newRun, pass, passDeadTests, takeIn } from '../helpers/factories.js';

let shop: BrowserShop;
let number: number;
let run: RunLog;
beforeAll(async () => {
  shop = await openShop();
  const { server } = shop;
  await addHeron(server);
  number = (await takeIn(server)).number;
  run = newRun(server, 'h6-find', {
    values: { 'drain-pump-winding': 96.8 },
    change: (result) => {
      if (result.kind !== 'note') return result;
      const { text: _never, ...rest } = result;
      return { ...rest, kind: 'skipped', stepKind: 'note', judged: true, reason: 'no time' };
    },
  });
  pass(server, run.steps.length + 1);
  await server.ok('recordRun', { params: { number }, as: server.people.technician, body: run });
});
afterAll(() => shop.close());

const captureId = (): string => run.steps.find((step) => step.kind === 'capture')?.captureId ?? '';

test('When a capture is opened, then chart, face and table say the same, and the file is saved as it was sent', async () => {
  const { page } = await shop.open(shop.server.people.technician);
  await page.goto(`/captures/${captureId()}`);
  await page.getByRole('heading', { name: 'G5K3' }).waitFor();
  // The simulated panel shows G5K3 in eight pairs of phases after its ready blink.
  const chart = page.getByRole('region', { name: 'Strip chart' });
  expect(await chart.getByRole('img').getAttribute('aria-label')).toMatch(/Ready blink from .* Code G5K3 from /);
  expect(await chart.getByText('G5K3, 8 times').count()).toBe(1);
  expect(await page.getByText('4 + 1 = 5').count()).toBe(1);
  await page.getByText('The chart as a table').click();
  await page.getByRole('cell', { name: 'code G5K3' }).waitFor();
  expect(await page.getByRole('cell', { name: /8 times, confidence 0\.\d{4}/ }).count()).toBe(1);

  const [download] = await Promise.all([page.waitForEvent('download'), page.getByRole('button', { name: 'Save the file' }).click()]);
  expect(download.suggestedFilename()).toMatch(new RegExp(`^${String(number).padStart(4, '0')}-.*\\.lamps\\.ndjson$`));
  const sent = run.steps.find((step) => step.kind === 'capture');
  expect(readFileSync(await download.path(), 'utf8')).toBe(sent?.kind === 'capture' ? sent.file : '');
});

test('When a capture was tapped in by keys, then its trace is square and has no threshold', async () => {
  const { server } = shop;
  await passDeadTests(server, number);
  // A key press holds its level until the next: the same panel, with a sample only where a lamp changed.
  const lines = captureFile('G5K3', { capturedAt: server.time.now.toISOString() }).trimEnd().split('\n');
  const header = { ...(JSON.parse(lines[0] ?? '') as object), source: 'keys' };
  let before = '';
  const samples = lines.slice(1, -1).flatMap((line) => {
    const [timeUs, ...levels] = JSON.parse(line) as [number, ...number[]];
    const tapped = JSON.stringify(levels.map((level) => (level > 400 ? 1023 : 0)));
    if (tapped === before) return [];
    before = tapped;
    return [JSON.stringify([timeUs, ...(JSON.parse(tapped) as number[])])];
  });
  const body = { ...newCapture(server), file: `${[JSON.stringify(header), ...samples, lines.at(-1)].join('\n')}\n` };
  const { id } = await server.ok('recordCapture', { params: { number }, as: server.people.technician, body });
  const { page } = await shop.open(server.people.technician);
  await page.goto(`/captures/${id}`);
  await page.getByRole('heading', { level: 1 }).waitFor();
  expect(await page.locator('.strip .trace').first().getAttribute('d')).toMatch(/^M[\d.]+ [\d.]+L/);
  expect(await page.locator('.strip .threshold').count()).toBe(0);
  // Square: every piece of the trace goes straight along or straight up.
  const slanted = await page.locator('.strip .trace').evaluateAll((paths) =>
    paths.flatMap((path) => {
      const points = (path.getAttribute('d') ?? '')
        .slice(1)
        .split('L')
        .map((point) => point.split(' ').map(Number));
      return points.filter((point, index) => index > 0 && point[0] !== points[index - 1]?.[0] && point[1] !== points[index - 1]?.[1]);
    }),
  );
  expect(slanted).toEqual([]);
});

test('When a bench log is opened, then a skipped step is not done and a failed reading stands against its limits', async () => {
  const { page } = await shop.open(shop.server.people.sales);
  await page.goto(`/units/${number}`);
  await page.getByRole('link', { name: 'Bench run h6-find' }).click();
  await page.getByRole('heading', { name: 'Bench log h6-find' }).waitFor();
  await page.getByText('rig bench-2').waitFor();
  const failed = page.getByRole('row').filter({ hasText: 'Drain pump winding' });
  expect(await failed.innerText()).toMatch(/140 to 180 Ω[\s\S]*96\.8 Ω ±0\.9[\s\S]*fail/);
  await page.getByText('Skipped: no time').waitFor();
  expect(await page.getByRole('row').filter({ hasText: 'not done' }).count()).toBeGreaterThan(0);
});

test('When the sales desk looks, then nothing is offered that its role may not do', async () => {
  const { page } = await shop.open(shop.server.people.sales);
  await page.goto(`/units/${number}`);
  await page.getByRole('heading', { name: 'What happened, newest first' }).waitFor();
  expect(await page.getByRole('button', { name: 'Record a repair' }).count()).toBe(0);
  expect(await page.getByText('Open the gate with a reason').count()).toBe(0);
  await page.goto('/units');
  await page.getByRole('table').waitFor();
  expect(await page.getByRole('link', { name: 'Take in a unit' }).count()).toBe(0);
});

test('When a repair is recorded on the unit’s page, then what was measured before it no longer counts', async () => {
  const unit = (await takeIn(shop.server)).number;
  await passDeadTests(shop.server, unit);
  const { page } = await shop.open(shop.server.people.technician);
  await page.goto(`/units/${unit}`);
  await page.getByRole('heading', { name: /^No\. / }).waitFor();
  expect(await page.getByText('Don’t put it on mains.').count()).toBe(0);
  await page.getByRole('button', { name: 'Record a repair' }).click();
  await page.getByLabel('Part, or what was done').fill('Drain pump');
  await page.getByLabel('Where the part came from').selectOption('used');
  await page.getByRole('button', { name: 'Record the repair' }).click();
  await page
    .getByRole('alert')
    .getByText(/From unit number/)
    .waitFor();
  await page.getByLabel('From unit number').fill(String(number));
  await page.getByLabel('Minutes').fill('36');
  await page.getByLabel('What the part cost').fill('6.00');
  await page.getByRole('button', { name: 'Record the repair' }).click();
  await page.getByRole('heading', { name: /^Drain pump replaced/ }).waitFor();
  await page.getByText('£6.00').waitFor();
  await page.getByText('Don’t put it on mains.').waitFor();
});

test('When a lead opens the dead-test gate with a reason, then the page shows who did and why', async () => {
  const unit = (await takeIn(shop.server)).number;
  const { page } = await shop.open(shop.server.people.lead);
  await page.goto(`/units/${unit}`);
  await page.getByText('Open the gate with a reason').click();
  await page.getByLabel(/Why it may be energised/).fill('short');
  await page.getByRole('button', { name: 'Open the gate' }).click();
  await page.getByText('say why, in at least 10 characters').waitFor();
  await page.getByLabel(/Why it may be energised/).fill('The insulation tester is away for repair.');
  await page.getByRole('button', { name: 'Open the gate' }).click();
  await page.getByText('Maren Holt opened the gate all the same: “The insulation tester is away for repair.”').waitFor();
});

test('When units are looked for, then the address holds what was looked for and the list follows', async () => {
  await takeIn(shop.server, {
    plate: { maker: 'Tarnwell', model: 'TD 80', serial: 'FIND 80', protectionClass: 'I' },
    appliance: 'dryer',
    family: undefined,
  });
  const { page } = await shop.open(shop.server.people.technician);
  await page.goto('/units');
  await page.getByLabel('Find').fill('tarnwell');
  await page.waitForURL('**/units?find=tarnwell');
  await page.getByRole('heading', { name: 'Units found: 1' }).waitFor();
  await page.getByRole('navigation', { name: 'Stage' }).getByRole('link', { name: 'repair' }).click();
  await page.waitForURL(/stage=repair/);
  await page.getByText('Nothing matches.').waitFor();
  await page.goBack();
  await page.getByRole('heading', { name: 'Units found: 1' }).waitFor();
});

test('When somebody picks the night bench, then it stays on this device, whatever the device prefers', async () => {
  const { page } = await shop.open(shop.server.people.technician, { fresh: true });
  await page.goto('/units');
  const ground = (): Promise<string> => page.evaluate(() => getComputedStyle(document.body).backgroundColor);
  await page.getByRole('button', { name: 'Night bench colours' }).click();
  // #101614, the enamel of the night bench.
  expect(await ground()).toBe('rgb(16, 22, 20)');
  await page.reload();
  await page.getByRole('button', { name: 'Day bench colours' }).waitFor();
  expect(await ground()).toBe('rgb(16, 22, 20)');
});

test('When the session ends while a page is open, then the next question leads to the sign-in page and back', async () => {
  const person = await shop.server.addPerson('technician', 'Tamsin Oake');
  const { page } = await shop.open(person);
  await page.goto('/units');
  await page.getByRole('table').waitFor();
  await shop.server.ok('signOut', { as: person });
  await page.goto(`/units/${number}`);
  await page.waitForURL(/\/sign-in\?back=%2Funits%2F/);
});

test('When the server does not answer, then the page says so and offers to try again', async () => {
  const { page } = await shop.open(shop.server.people.technician);
  await page.goto('/units');
  await page.getByRole('table').waitFor();
  const silence = { asked: 0, lasts: true };
  await page.route('**/api/units/*', (route) => ((silence.asked += 1), silence.lasts ? route.abort() : route.continue()));
  await page.getByRole('link', { name: `Unit ${String(number).padStart(4, '0')}` }).click();
  await page.getByRole('alert').getByText('The server does not answer.').waitFor();
  const before = silence.asked;
  await page.getByRole('button', { name: 'Try again' }).click();
  await expect.poll(() => silence.asked, { timeout: 20_000 }).toBeGreaterThan(before);
  // The page looks again by itself, too: the button is pressed while it is sure to be there.
  silence.lasts = false;
  await page.getByRole('heading', { name: 'What happened, newest first' }).waitFor();
});

test('When somebody else records on a unit whose page is open, then it is announced and nothing moves until it is asked for', async () => {
  const { server } = shop;
  const unit = (await takeIn(server)).number;
  const { page } = await shop.open(server.people.lead);
  await page.goto(`/units/${unit}`);
  await page.getByRole('heading', { name: 'What happened, newest first' }).waitFor();
  await passDeadTests(server, unit);
  const news = page.getByRole('button', { name: '3 new' });
  await news.waitFor();
  expect(await page.getByRole('heading', { name: /^Visual check/ }).count()).toBe(0);
  await news.click();
  await page.getByRole('heading', { name: /^Visual check/ }).waitFor();
  expect(await news.count()).toBe(0);
});
