import bwip from 'bwip-js/node';
import PDFDocument from 'pdfkit';
import { createRequire } from 'node:module';
import { readFileSync } from 'node:fs';
import { describe, expect, test } from 'vitest';
import { paperPdf } from '../../../cli/render/paper-pdf.js';
import { code128Bars, qrModules } from '../../../cli/render/paper-codes.js';
import { dayText } from '../../../cli/render/words.js';
import { qrDots } from '../../../shared/paper/codes.js';
import { BOLD_WIDTHS, HEAVY_WIDTHS, MONO_RANGES, READ_WIDTHS } from '../../../shared/paper/glyph-widths.js';
import { labelPaper } from '../../../shared/paper/label-paper.js';
import type { Paper } from '../../../shared/paper/pages.js';
import { LABEL_FORMATS, readLabelSize, TAG_FORMATS, type LabelSize, type TagFormat } from '../../../shared/paper/sizes.js';
import { tagPaper } from '../../../shared/paper/tag-paper.js';
import { widthMm, type Face } from '../../../shared/paper/type.js';
import { priceLabel, stockLabel, UNIT_ADDRESS } from '../../helpers/labels.js';
import { marginMm, pageSizes, partOf, picturesOf, readBars, readQr, wordsOnPaper, type Picture } from '../../helpers/read-paper.js';
import { tagPage } from '../../helpers/tag-page.js';

type Tag = ReturnType<typeof tagPage>;
const MADE_AT = new Date('2026-03-05T15:10:00Z');
const pdfOf = (paper: Paper): Promise<Buffer> => paperPdf(paper, MADE_AT);
const tagsOn = (format: TagFormat, ...tags: Tag[]): Paper =>
  tagPaper(
    tags.map((tag) => ({ tag, qr: qrModules(tag.url) })),
    format,
    dayText,
  );
const size = (text: string): LabelSize => {
  const read = readLabelSize(text);
  if (!read) throw new Error(`${text} is no size`);
  return read;
};
const points = (millimetres: number): number => (millimetres * 72) / 25.4;
/** Poppler prints two decimals. */
const EXACT_POINTS = 0.0051;

const [row] = tagPage().content.tested;
const rows = (count: number): Tag['content']['tested'] =>
  Array.from({ length: count }, (_, index) => ({ ...row!, title: `Check ${index + 1}` }));

describe('Codes on paper', () => {
  test('When a code is collected from the drawing library, then its modules are the library’s own', () => {
    const address = tagPage().url;
    const [qr] = bwip.raw('qrcode', address, 'eclevel=M') as unknown as [{ pixs: number[]; pixx: number }];
    const modules = qrModules(address);
    expect(modules.length).toBe(qr.pixx);
    expect(modules.flat().map(Number)).toEqual([...qr.pixs]);
    const [bars] = bwip.raw('code128', '0412', '') as unknown as [{ sbs: number[] }];
    // Bars and spaces take turns.
    const starts = [...bars.sbs].map((_, index, all) => all.slice(0, index).reduce((sum, wide) => sum + wide, 0));
    expect(code128Bars('0412').bars).toEqual(
      [...bars.sbs].flatMap((wide, index) => (index % 2 === 0 ? [{ start: starts[index], wide }] : [])),
    );
  });

  test('When a module is printed at 203 dpi, then it is a whole number of dots and at least half a millimetre', () => {
    for (const count of [25, 33, 45, 49, 53]) {
      const dots = qrDots(count);
      expect(Number.isInteger(dots)).toBe(true);
      expect((dots * 25.4) / 203).toBeGreaterThanOrEqual(0.5);
    }
  });
});

describe('Type on paper', () => {
  test('When a width is worked out, then it is what the shipped font files say', () => {
    const { resolve } = createRequire(import.meta.url);
    const doc = new PDFDocument({ autoFirstPage: false });
    const features = { kern: false, liga: false, calt: false } as unknown as PDFKit.Mixins.OpenTypeFeatures[];
    const faces: [Face, string, readonly { from: number; widths: readonly number[] }[]][] = [
      ['read', 'atkinson-hyperlegible-next/files/atkinson-hyperlegible-next-latin-400-normal.woff', READ_WIDTHS],
      ['bold', 'atkinson-hyperlegible-next/files/atkinson-hyperlegible-next-latin-700-normal.woff', BOLD_WIDTHS],
      ['heavy', 'atkinson-hyperlegible-next/files/atkinson-hyperlegible-next-latin-800-normal.woff', HEAVY_WIDTHS],
    ];
    const wrong: string[] = [];
    for (const [face, file, blocks] of faces) {
      doc
        .registerFont(face, readFileSync(resolve(`@fontsource/${file}`)))
        .font(face)
        .fontSize(1000);
      const { font } = (doc as unknown as { _font: { font: { hasGlyphForCodePoint(codePoint: number): boolean } } })._font;
      for (const { from, widths } of blocks)
        for (const [index, width] of widths.entries()) {
          const letter = String.fromCodePoint(from + index);
          if (width === 0 || !font.hasGlyphForCodePoint(from + index)) continue;
          if (Math.abs(doc.widthOfString(letter, { features }) - width) > 0.5) wrong.push(`${face} ${letter}`);
        }
    }
    doc
      .registerFont('mono', readFileSync(resolve('@fontsource/jetbrains-mono/files/jetbrains-mono-latin-400-normal.woff')))
      .font('mono')
      .fontSize(1000);
    expect(doc.widthOfString('0412 Ready', { features })).toBeCloseTo(6000, 3);
    expect(wrong).toEqual([]);
    // A sentence is the sum of its letters: no kerning, no ligatures.
    expect(points(widthMm('0412', 'mono', 10))).toBeCloseTo(24, 6);
  });

  test('When a letter is said to be there, then a part of the shipped face has it, in every weight', () => {
    const { resolve } = createRequire(import.meta.url);
    const doc = new PDFDocument({ autoFirstPage: false });
    const partHas = (family: string, part: string, weight: number): ((codePoint: number) => boolean) => {
      const name = `${family}-${part}-${weight}`;
      doc.registerFont(name, readFileSync(resolve(`@fontsource/${family}/files/${name}-normal.woff`))).font(name);
      const { font } = (doc as unknown as { _font: { font: { hasGlyphForCodePoint(codePoint: number): boolean } } })._font;
      return (codePoint) => font.hasGlyphForCodePoint(codePoint);
    };
    const MONO_PARTS = ['latin', 'latin-ext', 'greek', 'cyrillic', 'cyrillic-ext', 'vietnamese'];
    const mono = [400, 700].map((weight) => MONO_PARTS.map((part) => partHas('jetbrains-mono', part, weight)));
    const read = [400, 700, 800].map((weight) => ['latin', 'latin-ext'].map((part) => partHas('atkinson-hyperlegible-next', part, weight)));
    const missing: number[] = [];
    const want = (codePoint: number, faces: ((codePoint: number) => boolean)[][]): void => {
      if (!faces.every((parts) => parts.some((has) => has(codePoint)))) missing.push(codePoint);
    };
    for (const [first, last] of MONO_RANGES) for (let codePoint = first; codePoint <= last; codePoint += 1) want(codePoint, mono);
    for (const { from, widths } of READ_WIDTHS) for (const [index, width] of widths.entries()) if (width > 0) want(from + index, read);
    expect(missing).toEqual([]);
  });
});

describe('Tags on paper', () => {
  /** ISO 216 for A4 and A6; an inch is 25.4 mm. */
  const SIZES: Record<TagFormat, [number, number]> = { a6: [105, 148], '4x6': [101.6, 152.4], a4: [210, 297], letter: [215.9, 279.4] };

  test.each(TAG_FORMATS)(
    'When a tag is printed as %s, then the page is exact, black on white, and its QR code is read back',
    async (format) => {
      const pdf = await pdfOf(tagsOn(format, tagPage()));
      const [width, height] = SIZES[format];
      const pages = pageSizes(pdf);
      expect(pages).toHaveLength(1);
      expect(Math.abs(pages[0]!.width - points(width))).toBeLessThan(EXACT_POINTS);
      expect(Math.abs(pages[0]!.height - points(height))).toBeLessThan(EXACT_POINTS);
      const [picture] = picturesOf(pdf);
      expect(readQr(picture!)).toBe(tagPage().url);
      expect(picture!.coloured).toBe(0);
      // The outline's outer edge: 2.5 - 0.35 mm; on an office printer 4.6 - 0.35, outside the sixth of an inch it leaves white.
      expect(marginMm(picture!)).toBeGreaterThan(format === 'a6' || format === '4x6' ? 2 : 4.1);
      const words = wordsOnPaper(pdf);
      for (const said of [
        'Ready',
        '0412-2',
        'Brindle BW 714',
        '7143 0968 2251',
        '0.084 ±0.007 Ω',
        '2.31 ±0.14 MΩ',
        'Certifies no compliance.',
        '7QKF',
      ])
        expect(words).toContain(said);
      expect(pdf.toString('latin1')).toContain('/PrintScaling /None');
    },
  );

  test('When several tags are printed on A4, then four a sheet, each with its own code in its own quarter, and cut marks between them', async () => {
    const tags = ['0412-2', '0413-1', '0414-1', '0415-3', '0416-1'].map((tag) =>
      tagPage({ tag }, { url: `https://tags.millrace.example/t/${tag}/${'x'.repeat(86)}` }),
    );
    const pdf = await pdfOf(tagsOn('a4', ...tags));
    const [first, second] = picturesOf(pdf);
    const quarter = (picture: Picture | undefined, column: number, line: number): string | undefined => {
      const { width, height } = picture ?? { width: 0, height: 0 };
      const [half, halfHeight] = [Math.floor(width / 2), Math.floor(height / 2)];
      return picture && readQr(partOf(picture, column * half, line * halfHeight, half, halfHeight));
    };
    expect([quarter(first, 0, 0), quarter(first, 1, 0), quarter(first, 0, 1), quarter(first, 1, 1)]).toEqual(
      tags.slice(0, 4).map(({ url }) => url),
    );
    expect([quarter(second, 0, 0), quarter(second, 1, 1)]).toEqual([tags[4]?.url, undefined]);
    // A mark is on the line at which the sheet is cut, and on no tag: outlines end 4.25 mm from it.
    const { pages } = tagsOn('a4', ...tags);
    const marks = pages[0]!.marks.filter((mark) => mark.kind === 'line' && (mark.x1 === 105 || mark.y1 === 148.5));
    expect(marks).toHaveLength(6);
  });

  test.each(TAG_FORMATS)(
    'When more was tested than fits on a %s tag, then it goes on overleaf, and nothing is left out',
    async (format) => {
      const words = wordsOnPaper(await pdfOf(tagsOn(format, tagPage({ tested: rows(24), sample: true }))));
      expect(words).toContain('overleaf');
      for (const { title } of rows(24)) expect(words).toMatch(new RegExp(`${title}\\b`));
    },
  );

  test('When nothing was mended and the plate has no serial, then it is written all the same', async () => {
    const { plate } = tagPage().content;
    const bare = { maker: plate.maker, model: plate.model, plateUnreadable: true, protectionClass: 'II' } as const;
    const words = wordsOnPaper(await pdfOf(tagsOn('a6', tagPage({ mended: [], plate: bare, fourEyes: false }))));
    for (const said of ['serial unreadable', 'nothing had to be.', 'who worked on it too']) expect(words).toContain(said);
  });

  test('When names are long and in other scripts, then every letter shows as something that can be read', async () => {
    const { plate } = tagPage().content;
    const words = wordsOnPaper(
      await pdfOf(tagsOn('a6', tagPage({ plate: { ...plate, maker: 'Бриндл Łódź', model: '海尔 ﬁx ＢＷ🧺', serial: '9'.repeat(100) } }))),
    );
    expect(words).toContain('Бриндл Łódź [U+6D77 5C14] fix BW[U+1F9FA]');
    expect(words).toContain('…');
  });
});

describe('Labels on paper', () => {
  test.each([...LABEL_FORMATS, '40x20'])(
    'When labels of %s mm are printed, then the page is exact and each code is read back at 203 dpi',
    async (text) => {
      const { width, height } = size(text);
      const papers = [stockLabel(), stockLabel({ code: 'bars' }), priceLabel()].map((label) => labelPaper(label, { width, height }));
      const pdf = await pdfOf({ title: 'Labels', pages: papers.flatMap(({ pages }) => pages) });
      const pages = pageSizes(pdf);
      expect(pages).toHaveLength(3);
      for (const page of pages) {
        expect(Math.abs(page.width - points(width))).toBeLessThan(EXACT_POINTS);
        expect(Math.abs(page.height - points(height))).toBeLessThan(EXACT_POINTS);
      }
      const [qr, bars, price] = picturesOf(pdf);
      expect(readQr(qr!)).toBe(UNIT_ADDRESS);
      expect(readBars(bars!)).toBe('0412');
      for (const picture of [qr!, bars!, price!]) {
        expect(picture.coloured).toBe(0);
        expect(marginMm(picture)).toBeGreaterThan(1);
      }
      const words = wordsOnPaper(pdf);
      for (const said of ['0412', 'Brindle BW 714', '£129.00', 'grade B', '0412-2']) expect(words).toContain(said);
    },
  );

  test('When the address of a unit has no room as a QR code, then the bars of its number stand instead', async () => {
    const long = qrModules(`http://${'a-long-name.'.repeat(16)}example:4780/units/0412`);
    const [picture] = picturesOf(await pdfOf(labelPaper(stockLabel({ qr: long }), size('40x20'))));
    expect(readBars(picture!)).toBe('0412');
  });
});
