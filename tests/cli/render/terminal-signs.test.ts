import { Chalk } from 'chalk';
import { describe, expect, test } from 'vitest';
import { LampWindow } from '../../../cli/bench/lamp-window.js';
import type { Style } from '../../../cli/output.js';
import { faceLines } from '../../../cli/render/face-lines.js';
import { drawLanes, type LanesModel } from '../../../cli/render/lanes.js';
import { meterScale } from '../../../cli/render/meter-scale.js';
import { ScreenBlock } from '../../../cli/render/screen-block.js';
import { stepLines } from '../../../cli/render/step-lines.js';
import { outputOn } from '../../../cli/output.js';
import type { CaptureHeader } from '../../../shared/lamps/capture.js';
import { lampFace } from '../../../shared/lamps/face.js';
import { judge } from '../../../shared/measure/judge.js';
import { heron } from '../../helpers/unit-facts.js';

const plain: Style = { ink: new Chalk({ level: 0 }), unicode: true, columns: 80 };
const coloured: Style = { ...plain, ink: new Chalk({ level: 1 }) };

describe('The meter scale', () => {
  // A scale reaches 60 % of the span beyond two limits, 1.5 times an upper one, 2.6 times a lower one (look/tokens, Meter scale).
  test('When a reading lies between two limits, then a wedge stands over the thick part', () => {
    expect(meterScale({ value: 160, low: 140, high: 180, verdict: 'pass' }, plain)).toEqual([
      '                              ▼',
      '────────────────┃━━━━━━━━━━━━━━━━━━━━━━━━━━┃────────────────',
      '               140                        180',
    ]);
  });

  test('When a reading is off the scale, then the wedge stands at the edge and points outwards', () => {
    expect(meterScale({ value: 10, low: 140, high: 180, verdict: 'fail' }, plain)[0]).toBe('◀');
    expect(meterScale({ value: 400, low: 140, high: 180, verdict: 'fail' }, plain)[0]?.trimStart()).toBe('▶');
    expect(meterScale({ value: 400, low: 140, high: 180, verdict: 'fail' }, plain)[0]).toHaveLength(60);
  });

  test('When there is one limit, then the allowed side reaches the end of the axis', () => {
    expect(meterScale({ value: 2.31, low: 1, verdict: 'pass' }, plain)[1]).toMatch(/^─+┃━+$/);
    expect(meterScale({ value: 3.4, high: 3.5, verdict: 'inconclusive' }, plain)[1]).toMatch(/^━+┃─+$/);
    expect(meterScale({ value: 3.4, high: 3.5, verdict: 'inconclusive' }, { ...plain, unicode: false })[1]).toMatch(/^=+\|-+$/);
  });
});

describe('Lanes and lamp faces', () => {
  const model: LanesModel = {
    lanes: [
      { label: 'Fill', weight: 1, colour: 'amber', levels: [0, 0.125, 0.25, 0.5, 0.75, 0.9, 1, 1], lit: true, litFraction: 0.79 },
      { label: 'Lock', weight: undefined, colour: 'blue', levels: [0, 0, 0, 0, 0, 0, 0, 0], lit: false, litFraction: 0.34 },
    ],
    fromS: 0,
    marks: [{ atS: 1, label: 'next' }],
    phases: [
      { fromS: 0, toS: 1, selectorLit: true, digit: 5, whole: true },
      { fromS: 1, toS: 2, selectorLit: false, digit: 3, whole: true },
    ],
    segments: [{ kind: 'code', fromS: 0, toS: 8, code: 'G5K3', repeats: 4, confidence: 0.9982 }],
    letters: { on: 'G', off: 'K' },
  };

  test('When lanes are drawn, then levels stand in eighths and under them the seconds, the phases and the code', () => {
    expect(drawLanes(model, plain)).toEqual([
      '          │    ↓ next                                                  │ lit',
      ' fill    1│▁▁▂▄▆▇██                                                    │ ● 79 %',
      ' lock     │▁▁▁▁▁▁▁▁                                                    │ ○ 34 %',
      '          │                   5 s                 10 s                 │',
      ' phases    G5  K3',
      ' code      └──────── G5K3, 4 times ────────',
    ]);
  });

  test('When a lamp is drawn with colour, then amber is yellow, blue is cyan, and a dark one is a dim ring', () => {
    const [, fill, lock] = drawLanes(model, coloured);
    expect(fill).toContain('\u001b[33m●\u001b[39m');
    expect(lock).toContain('\u001b[2m○\u001b[22m');
  });

  test('When the locale is not UTF-8, then no sign beyond ASCII is left and every lane is as wide', () => {
    const lines = drawLanes(model, { ...plain, unicode: false });
    expect(lines.join('')).toMatch(/^[\x20-\x7e]*$/);
    expect(lines[1]?.indexOf('|', 11)).toBe(lines[2]?.indexOf('|', 11));
  });

  test('When a code is shown, then its face has a row a phase with the sum spelled out', () => {
    const face = lampFace('G5K3', heron);
    // Look, terminal: G is Spin lit with 4 + 1, K is Spin dark with 2 + 1.
    expect(face && faceLines(face, plain, ['Water level does not fall in time', '4 times'])).toEqual([
      ' G  ● ○ ● ○   ●   4 + 1 = 5    Water level does not fall in time',
      ' K  ● ● ○ ○   ○   2 + 1 = 3    4 times',
    ]);
  });
});

describe('A step that has ended', () => {
  const base = { startedAt: '2026-03-05T11:00:00Z', endedAt: '2026-03-05T11:04:00Z' };
  const reading = judge({ value: 96.8, unit: 'ohm', low: 140, high: 180, accuracy: { percentOfReading: 0.5, digits: 3 }, resolution: 0.1 });
  const measured = {
    ...base,
    kind: 'measure' as const,
    stepId: 'winding',
    title: 'Drain pump winding',
    reading: {
      checkId: 'winding',
      title: 'Drain pump winding',
      condition: 'dead' as const,
      source: 'meter' as const,
      accuracy: '0.5%+3',
      resolution: 0.1,
      judgement: reading,
    },
  };

  test('When a check was measured, then reading, spread, limits and verdict stand in columns', () => {
    // ±0.9: a = 0.5 % of 96.8 + 3 x 0.1, U = 2a/√3 (contract, section 4).
    expect(stepLines(4, measured, plain)).toEqual([' 4 measure  Drain pump winding      96.8 Ω ±0.9   140 to 180     ✕ fail']);
  });

  test('When a title is longer than its column, then it has a line of its own and the figures keep their place', () => {
    const [title, figures] = stepLines(10, { ...measured, title: 'Protective conductor current, running' }, plain);
    expect(title).toBe('10 measure  Protective conductor current, running');
    expect(figures?.indexOf('✕')).toBe(stepLines(4, measured, plain)[0]?.indexOf('✕'));
  });

  test('When a step was skipped, then it says not done and why', () => {
    const lines = stepLines(
      9,
      {
        ...base,
        kind: 'skipped',
        stepId: 'lamps',
        title: 'The lamps',
        stepKind: 'capture',
        judged: true,
        reason: 'a safety gate is shut: insulation is not done',
      },
      plain,
    );
    expect(lines[0]).toMatch(/^ 9 capture {2}The lamps +_ not done$/);
    expect(lines[1]).toBe('            a safety gate is shut: insulation is not done');
  });
});

describe('A picture that is drawn again in place', () => {
  test('When it is drawn twice, then the second goes over the first; after a change of width it begins on a clear screen', () => {
    const written: string[] = [];
    const stream = { isTTY: true, columns: 20, rows: 10, write: (text: string) => written.push(text) };
    const block = new ScreenBlock(outputOn(stream, { LANG: 'C.UTF-8' }));
    block.draw(['one', 'a line that is longer than the screen']);
    block.draw(['two']);
    stream.columns = 30;
    block.draw(['three']);
    expect(written).toEqual(['one\na line that is long\n', '\u001b[2A\r\u001b[Jtwo\n', '\u001b[2J\u001b[Hthree\n']);
  });
});

describe('The window on a capture', () => {
  const header: CaptureHeader = {
    format: 'refettle.lamps',
    version: 1,
    capturedAt: '2026-03-05T11:00:00Z',
    source: 'probe',
    lamps: ['a'],
    scale: { unit: 'counts', max: 100 },
  };

  test('When a capture goes on for an hour, then its memory stays bounded and the newest levels are there', () => {
    const window = new LampWindow(header, 10);
    for (let sample = 0; sample < 36_000; sample += 1)
      window.push({ kind: 'sample', tUs: sample * 100_000, levels: [sample < 35_990 ? 0 : 100] });
    const { capture, fromUs } = window.capture();
    expect(capture.timesUs.length).toBeLessThanOrEqual(126);
    expect(fromUs).toBeGreaterThan(3_580_000_000);
    expect(capture.timesUs[0]).toBe(0);
    expect(window.now).toEqual([1]);
    expect(window.columns(40).levels[0]).toHaveLength(40);
    expect(window.samples).toBe(36_000);
  });

  test('When samples are missing, then the lane holds what stood before', () => {
    const window = new LampWindow(header);
    window.push({ kind: 'sample', tUs: 0, levels: [50] });
    window.push({ kind: 'sample', tUs: 1_000_000, levels: [100] });
    expect(window.columns(8)).toEqual({ fromS: 0, levels: [[0.5, 0.5, 0.5, 0.5, 1]] });
  });
});
