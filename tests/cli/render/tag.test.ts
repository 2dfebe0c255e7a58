import { Chalk } from 'chalk';
import { describe, expect, test } from 'vitest';
import type { Style } from '../../../cli/output.js';
import { blankTagLines, shortUrl, tagLines } from '../../../cli/render/tag-box.js';
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

  test.each([
    { columns: 60, unicode: true, ohm: 'Ω' },
    { columns: 60, unicode: false, ohm: 'ohm' },
    { columns: 40, unicode: true, ohm: 'Ω' },
    { columns: 34, unicode: true, ohm: 'Ω' },
  ])('When a tag stands on a terminal of $columns columns, then no number, unit or verdict is cut', ({ columns, unicode, ohm }) => {
    const lines = tagLines(tagPage(), { ...plain, columns, unicode });
    for (const whole of [`0.084 ${ohm}`, `2.31 M${ohm}`, 'at most 3.50 mA', 'ready blink', 'look-up word 7QKF'])
      expect(lines.filter((line) => line.includes(whole))).toHaveLength(1);
    expect(lines.filter((line) => line.includes(' pass'))).toHaveLength(4);
    // The address is broken where the line ends.
    const inside = lines.map((line) => line.slice(8).replace(/[│|]$/, '').trim());
    expect(inside.join('')).toContain('tags.millrace.example/t/0412-2');
  });

  test('When an address is shown, then without its signature', () => {
    expect(shortUrl('https://tags.millrace.example/t/0412-2/abc')).toBe('tags.millrace.example/t/0412-2');
    expect(shortUrl('http://127.0.0.1:4780/t/0412-2/abc')).toBe('127.0.0.1:4780/t/0412-2');
  });
});
