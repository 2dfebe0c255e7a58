import { describe, expect, test } from 'vitest';
import { checkScript } from '../../../shared/script/check-script.js';
import type { Script, Step } from '../../../shared/script/schema.js';
import { heron, shopScript } from '../../helpers/unit-facts.js';

const scriptOf = (...steps: Step[]): Script => ({
  format: 'refettle.script',
  version: 1,
  name: 'tried',
  title: 'Tried',
  family: 'heron-h6',
  prove: false,
  steps,
});
const caution = (id = 'careful'): Step => ({ id, kind: 'caution', title: 'Careful', text: 'Mains on.' });
const capture = (id = 'lamps'): Step => ({ id, kind: 'capture', title: 'Lamps', seconds: 20 });
const discharge: Step = { id: 'discharge', kind: 'instruct', title: 'Discharge', discharge: true, text: 'Discharge.' };
const insulation: Step = { id: 'insulation', kind: 'measure', title: 'Insulation', check: 'insulation' };

describe('Checking a bench script against its sheet', () => {
  test.each(['h6-find', 'h6-mend', 'h6-prove'] as const)("When the demo shop's %s is checked, then nothing is wrong with it", (name) => {
    expect(checkScript(shopScript(name), heron)).toEqual([]);
  });

  test('Gate 2: when an energised step has no caution, or shares the one of the step before, then it is refused', () => {
    expect(checkScript(scriptOf(capture()), heron)).toEqual([
      { step: 'lamps', reason: 'an energised step needs a caution of its own before it' },
    ]);
    expect(checkScript(scriptOf(caution(), capture('one'), capture('two')), heron).map((finding) => finding.step)).toEqual(['two']);
    expect(checkScript(scriptOf(caution('a'), capture('one'), caution('b'), capture('two')), heron)).toEqual([]);
  });

  test('Gate 2: when an insulation test has no caution, or no discharge right after it, then it is refused', () => {
    expect(checkScript(scriptOf(insulation, discharge), heron).map((finding) => finding.reason)).toEqual([
      'an energised step needs a caution of its own before it',
    ]);
    expect(checkScript(scriptOf(caution(), insulation), heron).map((finding) => finding.reason)).toEqual([
      'an insulation test ends with an instruct step that has discharge: true',
    ]);
    expect(checkScript(scriptOf(caution(), insulation, discharge), heron)).toEqual([]);
  });

  test('When an instruction brings up service mode, then it shares the caution of the capture after it', () => {
    const serviceMode: Step = { id: 'service', kind: 'instruct', title: 'Service mode', procedure: 'service-mode' };
    expect(checkScript(scriptOf(caution(), serviceMode, capture()), heron)).toEqual([]);
    expect(checkScript(scriptOf(serviceMode), heron).map((finding) => finding.step)).toEqual(['service']);
  });

  test.each<[string, Step[], string]>([
    ['an id twice', [caution('same'), caution('same')], 'the id stands twice'],
    ['a check the sheet lacks', [{ id: 'x', kind: 'measure', title: 'X', check: 'belt' }], "the sheet has no measured check 'belt'"],
    ['an inspection measured', [{ id: 'x', kind: 'measure', title: 'X', check: 'visual' }], "the sheet has no measured check 'visual'"],
    [
      'a procedure the sheet lacks',
      [caution(), { id: 'x', kind: 'instruct', title: 'X', procedure: 'dance' }],
      "the sheet has no procedure 'dance'",
    ],
    [
      'an expectation without a capture',
      [{ id: 'x', kind: 'expect', title: 'X', of: 'lamps', code: 'none' }],
      "no capture step 'lamps' stands before it",
    ],
    ['an instruction that says nothing', [{ id: 'x', kind: 'instruct', title: 'X' }], 'an instruction needs a text or a procedure'],
    ['an inspection that asks nothing', [{ id: 'x', kind: 'inspect', title: 'X' }], 'an inspection needs a check or a question'],
    [
      'a watch without a time',
      [caution(), { id: 'x', kind: 'watch', title: 'X', begins: { lock: 'on' } }],
      'a watch needs begins, ends and withinS, or calibration: true',
    ],
  ])('When it holds %s, then it says where and why', (_, steps, reason) => {
    expect(checkScript(scriptOf(...steps), heron).map((finding) => finding.reason)).toContain(reason);
  });

  test('When it was written for another family, then it says so', () => {
    expect(checkScript({ ...scriptOf(caution()), family: 'wren-w3' }, heron)).toEqual([
      { step: undefined, reason: 'the script is for wren-w3, the sheet for heron-h6' },
    ]);
  });
});
