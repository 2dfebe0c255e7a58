// What stands behind damage in a run's journal: it opens nothing, and nothing of it is forgotten (gates 4 and 5 of the product).
import { expect, test } from 'vitest';
import { settleRun } from '../../../shared/history/settle-run.js';
import { energisingGate } from '../../../shared/readiness/gates.js';
import { runGateBreach } from '../../../shared/readiness/run-gates.js';
import type { RunLog, StepResult } from '../../../shared/script/run-log.js';
import { benchLog, captureFile, readingBody } from '../../helpers/bench-log.js';
import { facts, heron, intake, shopScript, wil } from '../../helpers/unit-facts.js';

const find = shopScript('h6-find');
const whole = benchLog({ id: '017f22e2-79b0-7cc3-98c4-dc0c0c073b00', script: find, scriptText: '', startedAt: '2026-03-03T10:00:00Z' });
let count = 0;
const settle = (log: RunLog) => settleRun(log, find, heron, wil, () => `damage-${(count += 1)}`);
const base = (stepId: string) => ({ stepId, title: stepId, startedAt: '2026-03-03T10:00:20Z', endedAt: '2026-03-03T10:00:40Z' });
const measured = (checkId: string, value?: number): StepResult => ({
  ...base(checkId),
  kind: 'measure',
  reading: readingBody(checkId, value),
});
/** The run was damaged behind its second step; these results were found behind the damage, and their steps were done again. */
const damaged = (...found: StepResult[]): RunLog => ({
  ...whole,
  damages: [{ line: 7, reason: 'its checksum is wrong', steps: 2, found }],
});

test('When a fail stands behind the damage, then it is on the books, the step done again takes nothing back, and the run should have stopped there', () => {
  // 1.9 ohm where the sheet allows 0.3.
  const settled = settle(damaged(measured('protective-conductor', 1.9)));
  const events = [intake(), ...settled.events];
  expect(energisingGate(facts(events), { rigSimulated: false }).reasons).toEqual(['protective conductor: fail']);
  expect(runGateBreach(settled, find, heron, facts([intake()]))).toMatchObject({
    stepId: 'insulation',
    reasons: ['protective conductor: fail'],
  });
  const note = settled.events.find(({ kind }) => kind === 'note');
  expect(note?.kind === 'note' && note.text).toContain('Line 7 of the journal of h6-find was damaged: its checksum is wrong');
});

test('When passes and clean lamps stand behind it, then they prove nothing; a code does', () => {
  const lamps = (panel: 'ready blink' | 'G5K3', end: string): StepResult => ({
    ...base('lamps'),
    kind: 'capture',
    captureId: `017f22e2-79b0-7cc3-98c4-dc0c0c073b${end}`,
    file: captureFile(panel),
    fromFile: false,
  });
  const looked: StepResult = {
    ...base('visual'),
    kind: 'inspect',
    inspection: { checkId: 'visual', title: 'Visual check', verdict: 'pass' },
  };
  const log = { ...damaged(looked, measured('heater'), lamps('ready blink', 'f0'), lamps('G5K3', 'f1')), steps: [], interrupted: true };
  const left = settle({ ...log, damages: log.damages?.map((one) => ({ ...one, steps: 0 })) });
  const kept = left.events.filter(({ kind }) => !['run began', 'run ended', 'note'].includes(kind));
  expect(kept).toMatchObject([{ kind: 'capture', capture: { answer: { codes: [{ code: 'G5K3' }] } } }]);
  // Their files are kept all the same.
  expect(left.captures).toHaveLength(2);
});

test('When a repair stands behind it, then the dead tests of before say nothing about the mended machine', () => {
  const repair: StepResult = {
    ...base('mended'),
    kind: 'repair',
    repair: { part: 'Drain pump', partSource: { kind: 'new' }, minutes: 30, costMinor: 2450 },
  };
  const settled = settle({ ...damaged(repair), damages: [{ line: 20, reason: 'torn', steps: 6, found: [repair] }] });
  expect(runGateBreach(settled, find, heron, facts([intake()]))?.reasons).toContain('visual check is not done');
});
