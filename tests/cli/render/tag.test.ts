import { Chalk } from 'chalk';
import jsqr from 'jsqr';
import { describe, expect, test } from 'vitest';
import type { Style } from '../../../cli/output.js';
import { blankTagLines, shortUrl, tagLines } from '../../../cli/render/tag-box.js';
import { tagPdf } from '../../../cli/render/tag-pdf.js';
import { qrDots, qrModules } from '../../../cli/render/tag-qr.js';
import { dayText, timeText } from '../../../cli/render/words.js';
import { tagPage } from '../../helpers/tag-page.js';
import { unitOnTheBench } from '../../helpers/unit-on-bench.js';

const plain: Style = { ink: new Chalk({ level: 0 }), unicode: true, columns: 80 };
/** The clock on the wall of wherever the test runs. */
const signed = `${dayText('2026-03-05T15:10:00Z')}, ${timeText('2026-03-05T15:10:00Z')}`;

describe('The tag at the terminal', () => {
  test('When a tag stands, then it is printed in full, with slanted corners and a hole', () => {
    const lines = tagLines(tagPage(), plain);
    expect(lines.map((line) => line.trimEnd())).toEqual([
      '    ╱────────────────────────────────────────────────────────────────────────┐',
      '   ╱    READY                                                    tag 0412-2  │',
      '  │     Brindle BW 714, washing machine, serial 7143 0968 2251               │',
      '  │     ───────────────────────────────────────────────────────────────────  │',
      '  │     Protective conductor  0.084 Ω  ±0.007  at most 0.300 Ω   ■ pass      │',
      '  │     Insulation            2.31 MΩ  ±0.14   at least 1.00 MΩ  ■ pass      │',
      '  │     Protective conductor current, running                                │',
      '  │ ○                         0.62 mA  ±0.07   at most 3.50 mA   ■ pass      │',
      '  │     Lamps: no code        20 s             ready blink       ■ pass      │',
      '  │     ───────────────────────────────────────────────────────────────────  │',
      `  │     ${`Mended: drain pump, used, ${dayText('2026-03-05T12:00:00Z')}, by Wil`.padEnd(69)}│`,
      `  │     ${`Signed off ${signed}, by Maren, lead`.padEnd(69)}│`,
      '  │     Warranty 12 months from the day of sale                              │',
      '   ╲    tags.millrace.example/t/0412-2     look-up word 7QKF                 │',
      '    ╲────────────────────────────────────────────────────────────────────────┘',
    ]);
  });

  test('When the results are simulated, then it says SAMPLE; when it was withdrawn, then that and why', () => {
    expect(tagLines(tagPage({ sample: true }), plain).join('\n')).toMatch(/READY {3}SAMPLE[\s\S]*no tag of a real machine/);
    const withdrawn = tagLines(tagPage({}, { withdrawn: { at: '2026-03-06T09:00:00Z', reason: 'the machine came back' } }), plain).join(
      '\n',
    );
    expect(withdrawn).toContain('WITHDRAWN');
    expect(withdrawn).toContain('the machine came back');
    expect(withdrawn).not.toContain('READY');
  });

  test('When a unit is not ready, then each missing rule says how to get it, and none is ticked', () => {
    const text = blankTagLines(unitOnTheBench().page, plain).join('\n');
    expect(text).toContain('No. 0412  intake');
    expect(text).toContain('0 of 5 rules met');
    expect(text).toMatch(/_ four eyes: no sign-off/);
    expect(text).toMatch(/_ checks passed: 0 of 3[\s\S]*Not done yet: Drain pump winding/);
    expect(text).not.toContain('■');
  });

  test('When the terminal is narrow or plain, then every line of a tag is as wide and ends at its edge', () => {
    for (const style of [plain, { ...plain, columns: 60 }, { ...plain, unicode: false }, { ...plain, columns: 120 }]) {
      const widths = new Set(tagLines(tagPage(), style).map((line) => [...line].length));
      expect([...widths]).toEqual([style.columns - 2]);
    }
  });

  test('When an address is shown, then without its signature', () => {
    expect(shortUrl('https://tags.millrace.example/t/0412-2/abc')).toBe('tags.millrace.example/t/0412-2');
    expect(shortUrl('http://127.0.0.1:4780/t/0412-2/abc')).toBe('127.0.0.1:4780/t/0412-2');
  });
});

describe('The tag on paper', () => {
  const pagesOf = (pdf: Buffer): number => pdf.toString('latin1').match(/\/Type \/Page\b/g)?.length ?? 0;

  test('When the QR code is read, then it is the address of the tag, whole', () => {
    const { url } = tagPage();
    const modules = qrModules(url);
    // Four pixels a module and the quiet zone of four modules (ISO/IEC 18004).
    const scale = 4;
    const size = (modules.length + 8) * scale;
    const pixels = new Uint8ClampedArray(size * size * 4).fill(255);
    modules.forEach((row, y) =>
      row.forEach((dark, x) => {
        if (!dark) return;
        for (let dy = 0; dy < scale; dy += 1)
          for (let dx = 0; dx < scale; dx += 1)
            pixels.fill(
              0,
              (((y + 4) * scale + dy) * size + (x + 4) * scale + dx) * 4,
              (((y + 4) * scale + dy) * size + (x + 4) * scale + dx) * 4 + 3,
            );
      }),
    );
    const read = jsqr as unknown as (data: Uint8ClampedArray, width: number, height: number) => { data: string } | null;
    expect(read(pixels, size, size)?.data).toBe(url);
  });

  test('When a module is printed at 203 dpi, then it is a whole number of dots and at least half a millimetre', () => {
    for (const count of [25, 33, 45, 49, 53]) {
      const dots = qrDots(count);
      expect(Number.isInteger(dots)).toBe(true);
      expect((dots * 25.4) / 203).toBeGreaterThanOrEqual(0.5);
    }
  });

  test('When the tag is written, then it is one A6 page, 105 by 148 mm, with its own faces in it', async () => {
    const pdf = await tagPdf(tagPage());
    const text = pdf.toString('latin1');
    const [, width, height] = /\/MediaBox \[0 0 ([\d.]+) ([\d.]+)\]/.exec(text) ?? [];
    // A point is 1/72 inch.
    expect([(Number(width) / 72) * 25.4, (Number(height) / 72) * 25.4].map((side) => Math.round(side * 10) / 10)).toEqual([105, 148]);
    expect(pagesOf(pdf)).toBe(1);
    for (const face of ['AtkinsonHyperlegibleNext-Regular', 'AtkinsonHyperlegibleNext-Bold', 'JetBrainsMono-Regular'])
      expect(text).toContain(face);
  });

  test('When more was tested than fits, then it goes on overleaf', async () => {
    const [one] = tagPage().content.tested;
    const tested = Array.from({ length: 14 }, (_, index) => ({ ...one, title: `Check ${index + 1}` })) as TagRows;
    expect(pagesOf(await tagPdf(tagPage({ tested })))).toBe(2);
  });

  test('When nothing was mended and the plate has no serial, then it is written all the same', async () => {
    const { plate } = tagPage().content;
    const pdf = await tagPdf(
      tagPage({
        mended: [],
        plate: { maker: plate.maker, model: plate.model, plateUnreadable: true, protectionClass: 'II' },
        sample: true,
        fourEyes: false,
      }),
    );
    expect(pagesOf(pdf)).toBe(1);
  });
});

type TagRows = ReturnType<typeof tagPage>['content']['tested'];
