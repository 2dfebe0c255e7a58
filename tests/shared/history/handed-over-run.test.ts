// Runs that were broken off, resumed and handed over. Facts of the trade and of the product's own gates; no published source.
import { describe, expect, test } from 'vitest';
import { BadInputError } from '../../../shared/errors.js';
import type { PersonRef } from '../../../shared/history/events.js';
import { settleRun } from '../../../shared/history/settle-run.js';
import { handsOn, readiness } from '../../../shared/readiness/readiness.js';
import { runGateBreach } from '../../../shared/readiness/run-gates.js';
import { runLogSchema, type RunLog, type RunPerson, type StepResult } from '../../../shared/script/run-log.js';
import { benchLog, captureFile } from '../../helpers/bench-log.js';
import { facts, heron, intake, maren, shopScript, wil } from '../../helpers/unit-facts.js';

const ines: PersonRef = { id: 'ines', name: 'Ines Marlow', role: 'lead' };
let count = 0;
const newId = (): string => `id-${(count += 1)}`;
const script = shopScript('h6-prove');
const whole = (change?: (result: StepResult) => StepResult | undefined): RunLog =>
  benchLog({
    id: '017f22e2-79b0-7cc3-98c4-dc0c0c073900',
    script,
    scriptText: '',
    startedAt: '2026-03-05T10:00:00Z',
    ...(change ? { change } : {}),
  });
const came = (person: typeof wil, how: RunPerson['how'], steps: number): RunPerson => ({ person, at: '2026-03-05T10:00:00Z', how, steps });
const placeOf = (log: RunLog, stepId: string): number => log.steps.findIndex((step) => step.stepId === stepId);
const settle = (log: RunLog) => settleRun(log, script, heron, wil, newId);
const breachOf = (log: RunLog) => runGateBreach(settle(log), script, heron, facts([intake()]));
/** Broken off before this step; what is done first after the return stands in `first`. */
const brokenOffBefore = (stepId: string, first: StepResult[] = []): RunLog => {
  const log = whole();
  const at = placeOf(log, stepId);
  return {
    ...log,
    people: [came(wil, 'began', 0), came(ines, 'took over', at)],
    steps: [...log.steps.slice(0, at), ...first, ...log.steps.slice(at)].map((step, index) =>
      index < at ? step : { ...step, by: ines.id },
    ),
  };
};
const cautionAgain = (stepId: string, answer: 'yes' | 'no' = 'yes'): StepResult => ({
  kind: 'caution',
  stepId,
  title: stepId,
  startedAt: '2026-03-05T10:05:00Z',
  endedAt: '2026-03-05T10:05:01Z',
  answer,
});

describe('A run that somebody else finished', () => {
  test('When two people did its steps, then each event is by the person of its step, and both had their hands on it', () => {
    const { events } = settle(brokenOffBefore('heater'));
    const by = (stepId: string) => events.find((event) => event.stepId === stepId)?.by.id;
    expect([by('drain-pump-winding'), by('heater'), by('lamps')]).toEqual([wil.id, ines.id, ines.id]);
    expect(events[0]).toMatchObject({ kind: 'run began', by: wil });
    expect(events.at(-1)).toMatchObject({ kind: 'run ended', by: ines, people: [wil, ines] });
    expect(handsOn(events).map(({ id }) => id)).toEqual([wil.id, ines.id]);
  });

  test('When a lead only took it over and did no step, then that lead may not sign (gate 7); another may', () => {
    const log = whole();
    const taken = { ...log, people: [came(wil, 'began', 0), came(maren, 'took over', log.steps.length)] };
    const facts_ = facts([{ ...intake(), at: '2026-03-01T09:00:00Z' }, ...settle(taken).events]);
    const fourEyes = (signer: typeof wil) => readiness(facts_, signer).rules.find(({ id }) => id === 'four-eyes')?.state;
    expect([fourEyes(maren), fourEyes(ines)]).toEqual(['fail', 'met']);
  });

  test('When a step names somebody who does not stand in the log, then the log is refused', () => {
    const log = whole((result) => (result.stepId === 'heater' ? { ...result, by: 'nobody' } : result));
    expect(() => settle(log)).toThrow(BadInputError);
  });

  test('When a log is from before there were hand-overs, then it reads as it did', () => {
    const { people: _people, ...old } = whole();
    const log = runLogSchema.parse(old);
    expect(log.people).toEqual([]);
    expect(settle(log).events.at(-1)).not.toHaveProperty('people');
  });
});

describe('The caution of before an interruption', () => {
  test('When nothing was broken off, then no gate is in the way', () => {
    expect(breachOf(whole())).toBeUndefined();
  });

  test.each(['lamps', 'insulation', 'calibration', 'protective-conductor-current', 'service-mode'])(
    'When the run was resumed at %s without its caution, then the log is refused; with it answered again it is not (gate 2)',
    (stepId) => {
      const at = placeOf(whole(), stepId);
      const caution = script.steps.slice(0, at).findLast((step) => step.kind === 'caution');
      expect(breachOf(brokenOffBefore(stepId))).toMatchObject({ stepId, reasons: ['its caution was not answered with yes'] });
      expect(breachOf(brokenOffBefore(stepId, [cautionAgain(caution?.id ?? '')]))).toBeUndefined();
      expect(breachOf(brokenOffBefore(stepId, [cautionAgain(caution?.id ?? '', 'no')]))).toMatchObject({ stepId });
    },
  );

  test('When another caution than its own is answered again, then that does not do', () => {
    expect(breachOf(brokenOffBefore('lamps', [cautionAgain('clear-caution')]))).toMatchObject({ stepId: 'clear-caution' });
  });

  test('When a step was tried again, then its caution stands twice though nobody came back, and the last answer counts', () => {
    const tried = (answer: 'yes' | 'no') => {
      const log = brokenOffBefore('lamps', [cautionAgain('lamps-caution', answer)]);
      return { ...log, people: [came(wil, 'began', 0), came(ines, 'took over', 0)] };
    };
    expect(breachOf(tried('yes'))).toBeUndefined();
    expect(breachOf(tried('no'))).toMatchObject({ stepId: 'lamps', reasons: ['its caution was not answered with yes'] });
  });

  test('When a step on a dead machine follows the return, then no caution is asked for', () => {
    expect(breachOf(brokenOffBefore('heater'))).toBeUndefined();
  });
});

describe('Lamps that were cut', () => {
  const cut: StepResult = {
    kind: 'cut',
    stepId: 'lamps',
    title: 'The lamps',
    startedAt: '2026-03-05T10:04:00Z',
    endedAt: '2026-03-05T10:04:20Z',
    captureId: '017f22e2-79b0-7cc3-98c4-dc0c0c0739f0',
    file: captureFile('G5K3'),
  };
  const withCut = (): RunLog => {
    const log = brokenOffBefore('lamps', [cautionAgain('lamps-caution')]);
    const at = placeOf(log, 'lamps-caution') + 1;
    return {
      ...log,
      people: log.people.map((one) => (one.how === 'took over' ? { ...one, steps: at + 1 } : one)),
      steps: [...log.steps.slice(0, at), cut, ...log.steps.slice(at)],
    };
  };

  test('When lamps were recorded before the break, then they stand before the whole capture, and a code in them is a code (gate 4)', () => {
    const log = withCut();
    expect(breachOf(log)).toBeUndefined();
    const { events, captures, verdict } = settle(log);
    expect(captures.map(({ id }) => id)).toContain(cut.kind === 'cut' ? cut.captureId : '');
    expect(events.filter((event) => event.stepId === 'lamps').map(({ kind }) => kind)).toEqual(['capture', 'capture']);
    // The step's own capture is what the expectation looks at: it was done again, and the run as such passes.
    expect(verdict).toBe('pass');
    const noCode = readiness(facts([intake(), ...events])).rules.find(({ id }) => id === 'no-code');
    expect(noCode?.state).toBe('fail');
  });

  test('When only the cut is there, then its step is not done', () => {
    const log = withCut();
    const broken = { ...log, steps: log.steps.filter((step) => step.stepId !== 'lamps' || step.kind === 'cut'), interrupted: true };
    expect(settle({ ...broken, steps: broken.steps.filter((step) => step.kind !== 'expect') }).verdict).toBe('not done');
  });
});
