import { describe, expect, test } from 'vitest';
import { BadInputError } from '../../../shared/errors.js';
import { settleReading } from '../../../shared/history/settle-reading.js';
import { settleRun } from '../../../shared/history/settle-run.js';
import { runGateBreach } from '../../../shared/readiness/run-gates.js';
import { readiness } from '../../../shared/readiness/readiness.js';
import type { RunLog } from '../../../shared/script/run-log.js';
import { benchLog, readingBody, type BenchLogOptions } from '../../helpers/bench-log.js';
import { facts, heron, intake, maren, shopScript, wil } from '../../helpers/unit-facts.js';

let count = 0;
const newId = (): string => `id-${(count += 1)}`;
const logOf = (name: 'h6-find' | 'h6-mend' | 'h6-prove', over: Partial<BenchLogOptions> = {}): RunLog =>
  benchLog({
    id: '017f22e2-79b0-7cc3-98c4-dc0c0c073900',
    script: shopScript(name),
    scriptText: '',
    startedAt: `2026-03-0${name === 'h6-find' ? 3 : name === 'h6-mend' ? 4 : 5}T10:00:00Z`,
    ...over,
  });
const settle = (log: RunLog, name: 'h6-find' | 'h6-mend' | 'h6-prove') => settleRun(log, shopScript(name), heron, wil, newId);

describe('A bench log made into what the shop believes', () => {
  test('When the find run is settled, then its capture is decoded, its readings judged, and the run is as good as its worst step', () => {
    const { verdict, events, captures, log } = settle(logOf('h6-find', { values: { 'drain-pump-winding': 96.4 } }), 'h6-find');
    expect(captures.map(({ body }) => body.answer.codes.map(({ code }) => code))).toEqual([['G5K3']]);
    expect(log.steps.find((step) => step.kind === 'expect')).toMatchObject({ verdict: 'pass', seen: 'G5K3' });
    expect(verdict).toBe('fail');
    expect(events.map((event) => event.kind)).toEqual([
      'run began',
      'inspection',
      'reading',
      'reading',
      'capture',
      'reading',
      'note',
      'run ended',
    ]);
  });

  test('When a unit was found, mended and proved by the three scripts, then a lead who did not touch it can sign', () => {
    const events = (['h6-find', 'h6-mend', 'h6-prove'] as const).flatMap((name) => settle(logOf(name), name).events);
    expect(
      readiness(facts([{ ...intake(), at: '2026-03-01T09:00:00Z' }, ...events]), maren).rules.filter((rule) => rule.state !== 'met'),
    ).toEqual([]);
  });

  test('When the sender claims a pass that the value does not bear, then the value is believed', () => {
    const lie = { ...readingBody('heater', 40), judgement: { ...readingBody('heater').judgement, value: 40, low: 0, high: 100 } };
    expect(settleReading(lie, heron).judgement).toMatchObject({ value: 40, low: 24, high: 29, verdict: 'fail' });
  });

  test("When the sender brings a coverage factor of its own, then the shop's is used", () => {
    const near = readingBody('protective-conductor-current', 3.44);
    expect(settleReading({ ...near, judgement: { ...near.judgement, coverageFactor: 0.001 } }, heron).judgement).toMatchObject({
      coverageFactor: 2,
      verdict: 'inconclusive',
    });
  });

  test('When a meter claims no uncertainty at all, then the reading is refused', () => {
    expect(() => settleReading({ ...readingBody('heater'), accuracy: '0%+0' }, heron)).toThrow(BadInputError);
  });

  test.each([
    ['a last digit that no meter has', { resolution: 1e-300, accuracy: '0%+1' }, 26.8],
    ['no half-width at all at zero', { accuracy: '1%+0', resolution: 0.1 }, 0],
    ['a resistance far below zero', {}, -100],
  ])('When it brings %s, then it is refused, for it would get round the guard band', (_, over, value) => {
    expect(() => settleReading({ ...readingBody('heater', value), ...over }, heron)).toThrow(BadInputError);
  });

  test('When a skipped step is called unjudged by the sender, then the script decides, and the run is not done (gate 3)', () => {
    const { verdict } = settle(
      logOf('h6-prove', {
        change: (step) =>
          step.kind === 'measure'
            ? {
                stepId: step.stepId,
                title: step.title,
                startedAt: step.startedAt,
                endedAt: step.endedAt,
                kind: 'skipped',
                stepKind: 'note',
                judged: false,
                reason: 'no',
              }
            : step,
      }),
      'h6-prove',
    );
    expect(verdict).toBe('not done');
  });

  test('When a code blinks in the capture of a watch, then it counts as a code (gate 4)', () => {
    const { events } = settle(logOf('h6-prove', { panels: { calibration: 'G5K3' } }), 'h6-prove');
    expect(events.filter((event) => event.kind === 'capture').map((event) => event.capture.answer.codes.map(({ code }) => code))).toEqual([
      [],
      ['G5K3'],
    ]);
  });

  test('When the sheet has no such check, then the reading is refused', () => {
    expect(() => settleReading({ ...readingBody('heater'), checkId: 'belt' }, heron)).toThrow("the sheet has no measured check 'belt'");
  });

  test('When a step of the script is missing from the log, then the run is at best not done (gate 3)', () => {
    const { verdict } = settle(logOf('h6-prove', { change: (step) => (step.stepId === 'heater' ? undefined : step) }), 'h6-prove');
    expect(verdict).toBe('not done');
  });

  test('When the calibration capture shows anything but the cycle, then the run cannot pass on the word of the bench', () => {
    const claimed = logOf('h6-prove', {
      panels: { calibration: 'ready blink' },
      change: (step) => (step.kind === 'watch' ? { ...step, watched: { seconds: 150, verdict: 'pass', reason: 'trust me' } } : step),
    });
    const { verdict, events } = settle(claimed, 'h6-prove');
    expect(events.find((event) => event.kind === 'calibration')?.calibration.verdict).toBe('inconclusive');
    expect(verdict).toBe('inconclusive');
  });
});

describe('The gates, walked again over a bench log', () => {
  const breach = (name: 'h6-find' | 'h6-prove', over: Partial<BenchLogOptions> = {}) =>
    runGateBreach(settle(logOf(name, over), name), shopScript(name), heron, facts([intake()]));

  test('When every step was done in order, then nothing is breached', () => {
    expect(breach('h6-find')).toBeUndefined();
    expect(breach('h6-prove')).toBeUndefined();
  });
  test('Gate 1: when insulation is missing from the log, then the first step on mains is the breach', () => {
    expect(breach('h6-find', { change: (step) => (step.stepId === 'insulation' ? undefined : step) })).toMatchObject({
      stepId: 'service-mode',
      reasons: ['insulation is not done'],
    });
  });
  test('Gate 1: when the protective conductor failed, then the insulation test after it is the breach', () => {
    expect(breach('h6-find', { values: { 'protective-conductor': 0.9 } })).toMatchObject({
      stepId: 'insulation',
      reasons: ['protective conductor: fail'],
    });
  });
  test('Gate 2: when a caution is missing, or was answered with no, then the energised step after it is the breach', () => {
    expect(breach('h6-find', { change: (step) => (step.stepId === 'power-caution' ? undefined : step) })).toMatchObject({
      stepId: 'service-mode',
      reasons: ['its caution was not answered with yes'],
    });
    expect(
      breach('h6-find', {
        change: (step) => (step.stepId === 'insulation-caution' && step.kind === 'caution' ? { ...step, answer: 'no' } : step),
      }),
    ).toMatchObject({ stepId: 'insulation' });
  });
  test('Gate 1: when the log is out of the order of its script, or names a step twice, then it is refused', () => {
    const log = logOf('h6-find');
    const lampsFirst = [...log.steps].sort((a, b) => Number(b.stepId === 'lamps') - Number(a.stepId === 'lamps'));
    const ask = (steps: RunLog['steps']) =>
      runGateBreach(settle({ ...log, steps }, 'h6-find'), shopScript('h6-find'), heron, facts([intake()]));
    expect(ask(lampsFirst)?.reasons).toEqual(['its caution was not answered with yes']);
    expect(ask([...log.steps, ...log.steps.slice(1, 2)])?.reasons).toEqual(['it stands out of the order of the script, or twice']);
    const skippedThenDone = log.steps.flatMap((step) =>
      step.stepId === 'visual'
        ? [
            {
              stepId: 'visual',
              title: 'x',
              startedAt: step.startedAt,
              endedAt: step.endedAt,
              kind: 'skipped' as const,
              stepKind: 'inspect',
              judged: true,
              reason: 'later',
            },
          ]
        : [step],
    );
    expect(ask([...skippedThenDone, ...log.steps.slice(1, 2)])).toMatchObject({
      stepId: 'protective-conductor',
      reasons: ['visual check is not done'],
    });
  });
  test("Gate 2: when only an earlier step's caution was answered, then it does not do for the insulation test", () => {
    expect(breach('h6-find', { change: (step) => (step.stepId === 'insulation-caution' ? undefined : step) })).toMatchObject({
      stepId: 'insulation',
    });
  });
  test('Gate 2: when the machine was not discharged after the insulation test, then whatever comes next is the breach', () => {
    const reasons = ['the machine was not discharged after the insulation test'];
    expect(breach('h6-find', { change: (step) => (step.stepId === 'discharge' ? undefined : step) })).toMatchObject({
      stepId: 'power-caution',
      reasons,
    });
    expect(
      breach('h6-find', {
        change: (step) => (step.stepId === 'discharge' && step.kind === 'instruct' ? { ...step, answer: 'not done' } : step),
      }),
    ).toMatchObject({ reasons });
  });
  test('When a log brings a step that the script does not have, or calls it by another kind, then it is refused', () => {
    expect(breach('h6-find', { change: (step) => (step.stepId === 'visual' ? { ...step, stepId: 'glance' } : step) })).toMatchObject({
      stepId: 'glance',
    });
    expect(
      breach('h6-find', {
        change: (step) =>
          step.stepId === 'insulation'
            ? { stepId: 'insulation', title: 'x', startedAt: step.startedAt, endedAt: step.endedAt, kind: 'note', text: 'done, trust me' }
            : step,
      }),
    ).toMatchObject({ stepId: 'insulation' });
  });
});
