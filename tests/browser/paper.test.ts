// What the browser prints, made into a PDF by the browser itself, held against what the terminal prints.
import type { Page } from 'playwright-core';
import { afterAll, beforeAll, expect, test } from 'vitest';
import { code128Bars, qrModules } from '../../cli/render/paper-codes.js';
import { paperPdf } from '../../cli/render/paper-pdf.js';
import { dayText } from '../../cli/render/words.js';
import { labelPaper } from '../../shared/paper/label-paper.js';
import { readLabelSize, TAG_SHEETS } from '../../shared/paper/sizes.js';
import { tagPaper } from '../../shared/paper/tag-paper.js';
import { openShop, PHONE, expectNoSidewaysScroll, type BrowserShop } from '../helpers/browser.js';
import { addHeron, mendAndProve, rulesSeen, takeIn } from '../helpers/factories.js';
import { stockLabel, priceLabel } from '../helpers/labels.js';
import { pageSizes, partOf, picturesOf, readBars, readQr, strayPart, wordsOnPaper, type Picture } from '../helpers/read-paper.js';

let shop: BrowserShop;
let numbers: number[];
beforeAll(async () => {
  // Outside the demo shop no tag is printed that points to this machine.
  shop = await openShop({}, { publicUrl: 'https://tags.millrace.example' });
  await addHeron(shop.server);
  numbers = [];
  for (let count = 0; count < 2; count += 1) {
    const { number } = await takeIn(shop.server);
    await mendAndProve(shop.server, number);
    await shop.server.ok('signOff', { as: shop.server.people.lead, params: { number }, body: await rulesSeen(shop.server, number) });
    numbers.push(number);
  }
});
afterAll(() => shop.close());

const MADE_AT = new Date('2026-03-05T15:10:00Z');
const text = (number: number): string => String(number).padStart(4, '0');
const first = (): number => numbers[0] ?? 0;
const second = (): number => numbers[1] ?? 0;
const tagOf = (number: number) => shop.server.ok('getUnitTag', { params: { number }, as: shop.server.people.sales });
const words = (pdf: Buffer): string[] => wordsOnPaper(pdf).split(' ').sort();

async function printed(page: Page): Promise<Buffer> {
  await page.evaluate(() => document.fonts.ready);
  return page.pdf({ preferCSSPageSize: true, printBackground: false });
}

/** Chromium's page sizes are whole points' fractions rounded up by its own units of 1/96 inch. */
const CHROMIUM_POINTS = 0.8;
/** Two renderers round edges to dots differently: a quarter of a millimetre apart at most, for all but three thousandths of the ink. */
const DOTS_APART = 2;
const STRAY_AT_MOST = 0.003;

/** Gives what the browser printed as pictures. */
function expectSamePaper(fromBrowser: Buffer, fromTerminal: Buffer): Picture[] {
  const [browserSizes, terminalSizes] = [pageSizes(fromBrowser), pageSizes(fromTerminal)];
  expect(browserSizes).toHaveLength(terminalSizes.length);
  for (const [index, size] of browserSizes.entries()) {
    expect(Math.abs(size.width - (terminalSizes[index]?.width ?? 0))).toBeLessThan(CHROMIUM_POINTS);
    expect(Math.abs(size.height - (terminalSizes[index]?.height ?? 0))).toBeLessThan(CHROMIUM_POINTS);
  }
  expect(words(fromBrowser)).toEqual(words(fromTerminal));
  const [browserPictures, terminalPictures] = [picturesOf(fromBrowser), picturesOf(fromTerminal, { inGreys: true })];
  for (const [index, picture] of browserPictures.entries()) {
    expect(picture.coloured).toBe(0);
    const other = terminalPictures[index]!;
    expect(strayPart(picture, other, DOTS_APART)).toBeLessThan(STRAY_AT_MOST);
    expect(strayPart(other, picture, DOTS_APART)).toBeLessThan(STRAY_AT_MOST);
  }
  return browserPictures;
}

// The sheets are the same pages four at a time: the terminal's test reads each quarter of both.
test('When a tag is printed from the browser at night, as a card and as a label, then it is the page that the terminal prints', async () => {
  const { page, complaints } = await shop.open(shop.server.people.sales, { night: true });
  const tag = await tagOf(first());
  await page.goto(`/units/${text(first())}/tag`);
  for (const [format, tab] of [
    ['a6', 'A6 card'],
    ['4x6', '4 x 6 in label'],
  ] as const) {
    await page.getByRole('link', { name: tab }).click();
    const { width, height } = TAG_SHEETS[format];
    await page.locator(`svg[viewBox="0 0 ${width} ${height}"]`).waitFor();
    const fromBrowser = await printed(page);
    expect(pageSizes(fromBrowser)).toHaveLength(1);
    const fromTerminal = await paperPdf(tagPaper([{ tag, qr: qrModules(tag.url) }], format, dayText), MADE_AT);
    const [picture] = expectSamePaper(fromBrowser, fromTerminal);
    expect(readQr(picture!)).toBe(tag.url);
  }
  expect(complaints).toEqual([]);
});

test('When two tags are printed on one A4 sheet, then each stands in its quarter; a unit without one is named', async () => {
  const { number } = await takeIn(shop.server);
  const { page } = await shop.open(shop.server.people.sales);
  await page.goto(`/units/${text(first())}/tag?format=a4`);
  await page.getByLabel('Units to print along').fill(`${text(second())}, ${text(number)}`);
  await page.getByText(`No standing tag, so left out: No. ${text(number)}.`).waitFor();
  await page.getByRole('img', { name: new RegExp(`${text(first())}-1, ${text(second())}-1 as printed`) }).waitFor();
  // An office printer's resolution.
  const [picture] = picturesOf(await printed(page), { dpi: 300, inGreys: true });
  const [width, height] = [Math.floor(picture!.width / 2), Math.floor(picture!.height / 2)];
  expect(readQr(partOf(picture!, 0, 0, width, height))).toBe((await tagOf(first())).url);
  // Each tag has a second page of its own beside it: the other tag begins the row below.
  expect(readQr(partOf(picture!, 0, height, width, height))).toBe((await tagOf(second())).url);
});

test('When labels are printed from the browser, then they are the labels that the terminal prints, and their codes are read back', async () => {
  const { page, complaints } = await shop.open(shop.server.people.sales, { night: true });
  await page.goto(`/units/${text(first())}`);
  await page.getByRole('link', { name: 'Stock label' }).click();
  await page.getByRole('img', { name: /Stock label of/ }).waitFor();
  const { unit, tag } = await shop.server.ok('getUnit', { params: { number: first() }, as: shop.server.people.sales });
  const address = `${shop.baseUrl}/units/${text(first())}`;
  const plate = { number: text(first()), maker: unit.plate.maker, model: unit.plate.model, appliance: unit.appliance };
  const stock = stockLabel({
    ...plate,
    ...{ serial: unit.plate.serial, takenIn: dayText(unit.takenInAt), qr: qrModules(address), bars: code128Bars(text(first())) },
  });
  const qr = await printed(page);
  const [qrPicture] = expectSamePaper(qr, await paperPdf(labelPaper(stock, readLabelSize('62x29')!), MADE_AT));
  expect(readQr(qrPicture!)).toBe(address);

  await page.getByLabel('Code').selectOption('bars');
  await page.getByLabel('Size in mm').fill('54x25');
  await page.locator('svg[viewBox="0 0 54 25"]').waitFor();
  const bars = await printed(page);
  const [barsPicture] = expectSamePaper(bars, await paperPdf(labelPaper({ ...stock, code: 'bars' }, readLabelSize('54x25')!), MADE_AT));
  expect(readBars(barsPicture!)).toBe(text(first()));

  await page.getByRole('link', { name: 'Price label' }).click();
  expect(await page.getByLabel('Size in mm').inputValue()).toBe('54x25');
  await page.getByText('Type a price, and the label is drawn here.').waitFor();
  expect(await page.getByRole('button', { name: /Print the/ }).count()).toBe(0);
  await page.getByLabel('Price in').fill('129');
  await page.getByLabel('Grade').fill('B');
  await page.getByRole('img', { name: /Price label of/ }).waitFor();
  const price = priceLabel({ ...plate, price: '£129.00', grade: 'B', tag: tag?.number });
  expectSamePaper(await printed(page), await paperPdf(labelPaper(price, readLabelSize('54x25')!), MADE_AT));
  expect(complaints).toEqual([]);
});

test('When labels and tags are looked at on a phone, then nothing is wider than it', async () => {
  const { page } = await shop.open(shop.server.people.sales, { viewport: PHONE });
  await page.goto(`/units/${text(first())}/labels?kind=price`);
  await page.getByText('Type a price, and the label is drawn here.').waitFor();
  await expectNoSidewaysScroll(page);
  await page.getByRole('link', { name: 'Stock label' }).click();
  await page.getByRole('img', { name: /Stock label of/ }).waitFor();
  await expectNoSidewaysScroll(page);
  await page.goto(`/units/${text(first())}/tag?format=a4`);
  await page.getByRole('img', { name: /as printed/ }).waitFor();
  await expectNoSidewaysScroll(page);
});

// Last: it withdraws the tags.
test('When a tag is withdrawn after its page was opened, then nothing that names it is printed, and the page says why', async () => {
  const { page, complaints } = await shop.open(shop.server.people.sales);
  await page.addInitScript(() => {
    window.print = () =>
      void (document.documentElement.dataset['prints'] = String(1 + Number(document.documentElement.dataset['prints'] ?? 0)));
  });
  const prints = async (): Promise<number> => Number(await page.evaluate(() => document.documentElement.dataset['prints'] ?? '0'));
  /** A lead withdraws the tag right before the page's next question about it arrives. */
  const withdrawnBeforeAsked = async (number: number, address: string): Promise<void> => {
    const params = { tag: `${text(number)}-1` };
    await page.route(
      `**${address}`,
      async (route) => {
        await shop.server.ok('withdrawTag', { as: shop.server.people.lead, params, body: { reason: 'the pump leaks again' } });
        await route.continue();
      },
      { times: 1 },
    );
  };

  await page.goto(`/units/${text(first())}/tag?with=${text(second())}`);
  const both = page.getByRole('img', { name: new RegExp(`${text(second())}-1 as printed.*page 1 of 2`) });
  await both.waitFor();
  await withdrawnBeforeAsked(second(), `/api/units/${second()}/tag`);
  await page.getByRole('button', { name: 'Print it' }).click();
  await page.getByText(`Not printed. Tag ${text(second())}-1 was withdrawn meanwhile.`).waitFor();
  await both.waitFor({ state: 'detached' });
  expect(await prints()).toBe(0);
  await page.getByRole('button', { name: 'Print it' }).click();
  await page.locator('html[data-prints="1"]').waitFor();

  await page.goto(`/units/${text(first())}/labels?kind=price`);
  await page.getByLabel('Price in').fill('129');
  await page.getByRole('img', { name: /Price label of/ }).waitFor();
  await withdrawnBeforeAsked(first(), `/api/units/${first()}`);
  await page.getByRole('button', { name: 'Print the price label' }).click();
  await page.getByText(`Not printed. Tag ${text(first())}-1 was withdrawn meanwhile`).waitFor();
  await page.getByText('the label says “for parts only, no tag”').waitFor();
  expect(await prints()).toBe(0);
  await page.getByRole('button', { name: 'Print the price label' }).click();
  await page.locator('html[data-prints="1"]').waitFor();
  expect(complaints).toEqual([]);
});
