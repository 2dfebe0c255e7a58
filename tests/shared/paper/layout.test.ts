import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { code128Bars, qrModules } from '../../../cli/render/paper-codes.js';
import { labelPaper } from '../../../shared/paper/label-paper.js';
import type { Mark, Paper } from '../../../shared/paper/pages.js';
import { cutToWidth, layLines } from '../../../shared/paper/pen.js';
import { LABEL_FORMATS, readLabelSize, TAG_FORMATS } from '../../../shared/paper/sizes.js';
import { tagPaper } from '../../../shared/paper/tag-paper.js';
import { readableText, runsOf, widthMm } from '../../../shared/paper/type.js';
import { isLoopbackAddress, unitAddress } from '../../../shared/paper/unit-address.js';
import { priceLabel, stockLabel } from '../../helpers/labels.js';
import { tagPage } from '../../helpers/tag-page.js';

const LABELS = [...LABEL_FORMATS, '40x20', '70x40', '210x297'];
const dayText = (): string => '5 Mar 2026';

/** The room a line of text takes, in millimetres: capitals and figures above the baseline, descenders below. */
interface Box {
  text: string;
  left: number;
  right: number;
  top: number;
  bottom: number;
}
const boxesOf = (marks: readonly Mark[]): Box[] =>
  marks.flatMap((mark) => {
    if (mark.kind !== 'text') return [];
    const em = (mark.points / 72) * 25.4;
    const box = { left: mark.x, right: mark.x + mark.widthMm, top: mark.baseline - em * 0.7, bottom: mark.baseline + em * 0.05 };
    return [{ ...box, text: mark.text }];
  });
/** Rounding of sums of widths. */
const SLACK_MM = 0.05;
const overlap = (a: Box, b: Box): boolean =>
  a.left < b.right - SLACK_MM && b.left < a.right - SLACK_MM && a.top < b.bottom - SLACK_MM && b.top < a.bottom - SLACK_MM;

/** What stands over something else, or off the page. */
function faultsOn({ pages }: Paper, margin: number): string[] {
  return pages.flatMap(({ widthMm: width, heightMm: height, marks }) => {
    const boxes = boxesOf(marks);
    const outside = boxes.filter(
      (box) =>
        box.left < margin - SLACK_MM ||
        box.right > width - margin + SLACK_MM ||
        box.top < margin - SLACK_MM ||
        box.bottom > height - margin + SLACK_MM,
    );
    const over = boxes.flatMap((box, index) =>
      boxes.slice(index + 1).flatMap((other) => (overlap(box, other) ? [`'${box.text}' over '${other.text}'`] : [])),
    );
    return [...outside.map(({ text }) => `'${text}' off the page`), ...over];
  });
}
const wordsOf = ({ pages }: Paper): string => pages.flatMap(({ marks }) => boxesOf(marks).map(({ text }) => text)).join(' ');

describe('Text on paper', () => {
  test('When a text has letters that no shipped face has, then each is still told apart', () => {
    // NFC, compatibility forms and marks by Unicode Standard Annex 15.
    expect(readableText('Łódź ｗａｓｈ')).toBe('Łódź wash');
    expect(readableText('海尔 X1')).toBe('[U+6D77 5C14] X1');
    expect(readableText('e\u0301\u200b\u00ad tab\tend\n')).toBe('é tab end ');
    expect(readableText('ḍ 🧺')).toBe('d [U+1F9FA]');
    expect(runsOf('12 Ω', 'read')).toEqual([
      { text: '12 ', face: 'read' },
      { text: 'Ω', face: 'mono' },
    ]);
    fc.assert(
      fc.property(fc.string({ unit: 'grapheme', maxLength: 40 }), (text) => {
        const shown = readableText(text);
        expect(readableText(shown)).toBe(shown);
        if (/[\p{L}\p{N}]/u.test(text)) expect(shown.trim()).not.toBe('');
        for (const face of ['read', 'mono'] as const) expect(Number.isFinite(widthMm(text, face, 8))).toBe(true);
      }),
      { numRuns: 300 },
    );
  });

  test('When a text is cut, then it ends with an ellipsis and is no wider than its room', () => {
    expect(cutToWidth('Insulation', 'read', 8, 20)).toBe('Insulation');
    const cut = cutToWidth('Protective conductor current, running', 'read', 8, 20);
    expect(cut).toMatch(/^Protective.*…$/);
    expect(widthMm(cut, 'read', 8)).toBeLessThanOrEqual(20);
  });

  test('When a paragraph has no room, then it is set smaller, never below 7 points, then cut; a long word is broken', () => {
    const text = 'two people to lift '.repeat(12);
    const laid = layLines([{ text, face: 'read' }], { points: 8.5, width: 50, lineHeight: 3.8, mostLines: 3 });
    expect(laid.points).toBe(7);
    expect(laid.lines).toHaveLength(3);
    expect(laid.lines.at(-1)?.at(-1)?.text).toMatch(/…$/);
    const word = layLines([{ text: '9'.repeat(100), face: 'mono' }], { points: 8, width: 40, lineHeight: 4 });
    expect(
      word.lines
        .flat()
        .map((run) => run.text)
        .join(''),
    ).toBe('9'.repeat(100));
    for (const line of word.lines) for (const run of line) expect(widthMm(run.text, run.face, 8)).toBeLessThanOrEqual(40);
  });
});

const words = fc.oneof(
  fc.string({ unit: 'grapheme', minLength: 1, maxLength: 100 }),
  fc.lorem({ maxCount: 12 }),
  fc.constantFrom('Brindle', '海尔海尔', 'Бриндл и сыновья', 'غسالة', 'W'.repeat(100)),
);
const RUNS = { numRuns: 60 };

describe('Layout', () => {
  test('When a tag says anything at all, then nothing stands over anything else, and nothing is off the page or below 7 points', () => {
    const qr = qrModules(tagPage().url);
    fc.assert(
      fc.property(
        fc.constantFrom(...TAG_FORMATS),
        fc.record({ maker: words, model: words, serial: words, part: words, by: words, shop: words, caution: words, title: words }),
        fc.nat(16),
        (format, said, checks) => {
          const { content } = tagPage();
          const [row] = content.tested;
          const tested = Array.from({ length: checks }, (_, index) => ({
            ...row!,
            title: `${index} ${said.title}`,
            reading: said.by.slice(0, 20),
            limit: said.model.slice(0, 30),
          }));
          const tag = tagPage();
          const paper = tagPaper(
            [
              {
                qr,
                tag: {
                  ...tag,
                  content: {
                    ...content,
                    plate: { ...content.plate, maker: said.maker, model: said.model, serial: said.serial },
                    tested,
                    mended: [{ part: said.part, source: 'used', at: '2026-03-05T12:00:00Z', by: said.by }],
                    signedOffBy: said.by,
                    cautions: [said.caution, said.part],
                    shop: { ...content.shop, name: said.shop },
                  },
                },
              },
            ],
            format,
            dayText,
          );
          expect(faultsOn(paper, 4)).toEqual([]);
          for (const { marks } of paper.pages)
            for (const mark of marks) if (mark.kind === 'text') expect(mark.points).toBeGreaterThanOrEqual(7);
        },
      ),
      RUNS,
    );
  });

  test.each(TAG_FORMATS)('When figures are wider than their columns on %s, then every number is whole and has its unit', (format) => {
    const [row] = tagPage().content.tested;
    const wide = { ...row!, title: 'Insulation of the water heater against its sheath, at 500 V for 60 s after 48 h of soaking at 20 °C' };
    const tested = [
      // Wider than the column by its spread alone; by the limit; by everything; and lamps, where no reading stands beside the limit.
      { ...wide, reading: '-1234.567 MΩ', spread: '±1234.567', limit: 'at least 1234567.89 MΩ' },
      { ...wide, reading: '12345678901234567890 Ω', spread: '±0.00000000000001', limit: '123456789012345 to 12345678901234567890 Ω' },
      { ...wide, title: 'Lamps', reading: '20 s', spread: undefined, limit: 'at least 20 s', lamps: [true, false] },
      { ...wide, title: 'Filter', reading: 'nothing wrong', spread: undefined, limit: 'nothing wrong' },
    ];
    const tag = tagPage({ tested });
    const paper = tagPaper([{ tag, qr: qrModules(tag.url) }], format, dayText);
    expect(faultsOn(paper, 4)).toEqual([]);
    const said = wordsOf(paper);
    for (const whole of [
      ...['-1234.567 MΩ', '±1234.567 MΩ', 'at least', '1234567.89', '12345678901234567890 ±0.00000000000001 Ω'],
      ...['123456789012345 to 12345678901234567890 Ω', 'at least 20 s', 'nothing wrong', '500 V', '60 s', '48 h', '20 °C'],
    ])
      expect(said).toContain(whole);
    expect(said).not.toContain('…');
  });

  test('When a label says anything at all, then nothing stands over anything else, and nothing is off the label or below 7 points', () => {
    const bars = code128Bars('2000000000');
    fc.assert(
      fc.property(fc.constantFrom(...LABELS), words, words, words, fc.boolean(), (text, maker, model, other, flag) => {
        const size = readLabelSize(text);
        if (!size) throw new Error(text);
        const stock = stockLabel({
          maker,
          model,
          serial: other,
          number: '2000000000',
          bars,
          code: flag ? 'qr' : 'bars',
          licensedOnly: flag,
        });
        const price = priceLabel({
          maker,
          model,
          grade: other.slice(0, 12),
          price: '£1,234,567.00',
          shop: { name: other, phone: '01632' },
        });
        for (const label of [stock, price]) {
          const paper = labelPaper(label, size);
          expect(faultsOn(paper, 1)).toEqual([]);
          for (const mark of paper.pages[0]!.marks) if (mark.kind === 'text') expect(mark.points).toBeGreaterThanOrEqual(7);
        }
      }),
      RUNS,
    );
  });

  test.each(LABELS)('When a label of %s mm must warn, then the warning is on it', (text) => {
    const size = readLabelSize(text)!;
    for (const code of ['qr', 'bars'] as const)
      expect(wordsOf(labelPaper(stockLabel({ licensedOnly: true, code }), size))).toMatch(/Licensed person only|Licensed person…/);
    expect(wordsOf(labelPaper(priceLabel({ tag: undefined }), size))).toContain('For parts only, no tag.');
  });
});

describe('Sizes and addresses', () => {
  test('When a size is typed, then it is width by height in millimetres, and one that cannot be drawn is refused', () => {
    expect(readLabelSize('62x29')).toEqual({ width: 62, height: 29 });
    expect(readLabelSize(' 101.6 X 76.2')).toEqual({ width: 101.6, height: 76.2 });
    for (const wrong of ['', '62', '62x', 'x29', '62x29x3', '-62x29', '39x29', '62x19', '211x50', '1e2x50', '62,5x29'])
      expect(readLabelSize(wrong)).toBeUndefined();
  });

  test('When an address opens only on its own machine, then that is known', () => {
    // RFC 6761 (localhost), RFC 1122 (127/8), RFC 4291 (::1).
    for (const address of ['http://127.0.0.1:4780', 'http://localhost', 'https://shop.localhost/x', 'http://[::1]:4780'])
      expect(isLoopbackAddress(address)).toBe(true);
    for (const address of ['http://shop.local:4780', 'https://128.0.0.1', 'http://localhost.example'])
      expect(isLoopbackAddress(address)).toBe(false);
    expect(unitAddress('http://shop.local:4780/', '0412')).toBe('http://shop.local:4780/units/0412');
  });
});
