import type { Sheet } from '../sheet/schema.js';
import { energisingOf } from './energised.js';
import type { StepResult } from './run-log.js';
import type { Script, Step } from './schema.js';

/**
 * Whether a step puts test voltage on the machine. Without a sheet (it is not at hand) by the script alone, which has a discharge
 * behind every such test (`checkScript`): rather one step too many than one too few.
 */
function putsTestVoltageOn(step: Step, script: Script, sheet: Sheet | undefined): boolean {
  if (sheet) return energisingOf(step, sheet) === 'test voltage';
  const next = script.steps[script.steps.indexOf(step) + 1];
  return step.kind === 'measure' && next?.kind === 'instruct' && next.discharge === true;
}

const isDischarge = (step: Step | undefined, result: StepResult): boolean =>
  step?.kind === 'instruct' && step.discharge === true && result.kind === 'instruct' && result.answer === 'done';

/**
 * Whether the machine may hold the charge of a test: its insulation was tested with some hundred volts, and no discharge is written
 * down after it. Whoever leaves, resumes or closes such a run is told so, and nothing else is done on it before its discharge (gate 2).
 *
 * `results` are those of a run in their order, `begun` is the step that was begun and has no result: a test that was broken off charges,
 * too. `sheet` may be absent; the script then decides.
 *
 * @example isCharged([insulation], find, heron) // true
 * @example isCharged([insulation, dischargeDone], find, heron) // false
 */
export function isCharged(results: readonly StepResult[], script: Script, sheet?: Sheet, begun?: string): boolean {
  const steps = new Map(script.steps.map((step) => [step.id, step]));
  const tests = (stepId: string | undefined): boolean => {
    const step = stepId === undefined ? undefined : steps.get(stepId);
    return step !== undefined && putsTestVoltageOn(step, script, sheet);
  };
  let charged = false;
  for (const result of results) {
    if (isDischarge(steps.get(result.stepId), result)) charged = false;
    else if (result.kind !== 'skipped' && tests(result.stepId)) charged = true;
  }
  return charged || tests(begun);
}

/** Whether a measurement of a run (its place among the results) left no charge behind: it was no such test, or its discharge is written down after it and before the next. */
export function isDischargedAfter(results: readonly StepResult[], place: number, script: Script, sheet: Sheet): boolean {
  const next = results.findIndex((result, index) => index > place && isCharged([result], script, sheet));
  return !isCharged(results.slice(place, next < 0 ? undefined : next), script, sheet);
}
