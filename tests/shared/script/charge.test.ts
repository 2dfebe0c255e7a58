// An insulation test at 500 V ends with discharge (gate 2). Expected values: the product's own gates; no published source.
import { describe, expect, test } from 'vitest';
import { settleRun } from '../../../shared/history/settle-run.js';
import { energisingGate, mayHoldCharge } from '../../../shared/readiness/gates.js';
import { readiness } from '../../../shared/readiness/readiness.js';
import { isCharged } from '../../../shared/script/charge.js';
import { energisingOfCheck } from '../../../shared/script/energised.js';
import type { RunLog, StepResult } from '../../../shared/script/run-log.js';
import type { MeasuredCheck } from '../../../shared/sheet/schema.js';
import { benchLog } from '../../helpers/bench-log.js';
import { facts, goodReading, heron, intake, maren, override, reading, shopScript, wil } from '../../helpers/unit-facts.js';

const find = shopScript('h6-find');
const whole = benchLog({ id: '017f22e2-79b0-7cc3-98c4-dc0c0c073a00', script: find, scriptText: '', startedAt: '2026-03-03T10:00:00Z' });
/** The results up to a step and with it, as the log of a run that was abandoned there. */
const upTo = (stepId: string, change: (result: StepResult) => StepResult = (result) => result): RunLog => {
  const last = whole.steps.findIndex((result) => result.stepId === stepId);
  return { ...whole, interrupted: true, steps: whole.steps.slice(0, last + 1).map(change) };
};
const asWritten = (log: RunLog) => isCharged(log.steps, find, heron);
let count = 0;
const eventsOf = (log: RunLog) => settleRun(log, find, heron, wil, () => `charge-${(count += 1)}`).events;
const dischargeNotDone = (result: StepResult): StepResult => (result.kind === 'instruct' ? { ...result, answer: 'not done' } : result);

describe('Whether the machine may hold the charge of its insulation test', () => {
  test('When the test is the last that was done, then it may; when the discharge is done, then not', () => {
    expect(asWritten(upTo('insulation-caution'))).toBe(false);
    expect(asWritten(upTo('insulation'))).toBe(true);
    expect(asWritten(upTo('discharge'))).toBe(false);
    expect(asWritten(whole)).toBe(false);
  });

  test('When the discharge was answered with not done, or skipped, then it may', () => {
    expect(asWritten(upTo('discharge', dischargeNotDone))).toBe(true);
    const { steps } = upTo('insulation');
    const base = { stepId: 'discharge', title: 'Discharge', startedAt: '2026-03-03T10:05:00Z', endedAt: '2026-03-03T10:05:00Z' };
    expect(isCharged([...steps, { ...base, kind: 'skipped', stepKind: 'instruct', judged: true, reason: 'stopped' }], find, heron)).toBe(
      true,
    );
  });

  test('When the test was begun and has no result, then it may; when another step was begun, then not', () => {
    const { steps } = upTo('insulation-caution');
    expect(isCharged(steps, find, heron, 'insulation')).toBe(true);
    expect(isCharged(steps, find, heron, 'protective-conductor')).toBe(false);
  });

  test('When no sheet is at hand, then the discharge behind it in the script tells which measurement it is', () => {
    expect(isCharged(upTo('insulation').steps, find)).toBe(true);
    expect(isCharged(upTo('discharge').steps, find)).toBe(false);
    expect(isCharged(upTo('protective-conductor').steps, find)).toBe(false);
  });

  test.each([
    ['deadTest insulation, measured as a resistance', { deadTest: 'insulation', quantity: 'resistance' }, 'test voltage'],
    ['insulation resistance, no dead test', { quantity: 'insulation resistance' }, 'test voltage'],
    ['a resistance on mains', { quantity: 'resistance', condition: 'energised' }, 'mains'],
    ['a resistance', { quantity: 'resistance' }, 'dead'],
  ] as const)('When a check is %s, then the sheet’s marks decide what it does to the machine', (_what, marks, expected) => {
    const winding = heron.checks.find(({ id }) => id === 'drain-pump-winding');
    expect(energisingOfCheck({ ...(winding as MeasuredCheck), ...marks })).toBe(expected);
  });
});

describe('An insulation test without its discharge', () => {
  const gate = (log: RunLog, ...after: ReturnType<typeof intake>[]) =>
    energisingGate(facts([intake(), ...eventsOf(log), ...after]), { rigSimulated: false });

  test('When the run was left behind the test, then its pass opens no gate; with its discharge it does', () => {
    expect(gate(upTo('discharge'))).toEqual({ open: true, reasons: [] });
    expect(gate(upTo('insulation')).reasons).toEqual([
      'insulation has no discharge written down after it: discharge the machine, then do it again and discharge',
    ]);
    expect(gate(upTo('discharge', dischargeNotDone)).open).toBe(false);
  });

  test('When it is done again with its discharge, or a lead who knows opens the gate, then it is open', () => {
    expect(gate(upTo('insulation'), goodReading('insulation')).open).toBe(true);
    expect(gate(upTo('insulation'), override()).override?.by).toBe(maren.name);
  });

  test('When it failed, then it is a fail, discharged or not, and a pass after it takes nothing back', () => {
    const failed = benchLog({ ...{ id: whole.id, script: find, scriptText: '', startedAt: whole.startedAt }, values: { insulation: 0.2 } });
    const at = failed.steps.findIndex(({ stepId }) => stepId === 'insulation');
    const left = { ...failed, interrupted: true, steps: failed.steps.slice(0, at + 1) };
    // By the same meter: a closer one may take it back (gate 5).
    expect(gate(left, reading('insulation', 2.3, { accuracy: '3%+5' })).reasons).toEqual(['insulation: fail']);
  });

  test('When the sender says whether it was discharged, then the log’s own steps are believed', () => {
    const claimed = upTo('discharge', (result) =>
      result.kind === 'measure' ? { ...result, reading: { ...result.reading, undischarged: true } } : result,
    );
    expect(gate(claimed).open).toBe(true);
  });

  test('When it is asked for at sign-off, then the rule misses it, and whoever comes to the machine is told', () => {
    const events = [intake(), ...eventsOf(upTo('insulation'))];
    const rule = readiness(facts(events)).rules.find(({ id }) => id === 'electrical-safety');
    expect(rule?.how).toContain('Insulation');
    expect([mayHoldCharge(events), mayHoldCharge([...events, goodReading('insulation')]), mayHoldCharge([intake()])]).toEqual([
      true,
      false,
      false,
    ]);
  });
});
