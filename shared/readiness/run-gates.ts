import type { SettledRun } from '../history/settle-run.js';
import { deadTestOfStep, energisingOf, usesCaution } from '../script/energised.js';
import type { Script, Step } from '../script/schema.js';
import type { Sheet } from '../sheet/schema.js';
import type { UnitFacts } from './facts.js';
import { energisingGate, type GateState } from './gates.js';

/**
 * Whether the safety gates let this step of a bench run begin, with what the run recorded so far among the facts.
 *
 * A dead test asks for the dead tests before it; a step on mains asks for all three. A step that leaves the machine
 * isolated is always free.
 */
export function stepGate(step: Step, sheet: Sheet, facts: UnitFacts, rigSimulated: boolean): GateState {
  const deadTest = deadTestOfStep(step, sheet);
  if (deadTest) return energisingGate(facts, { rigSimulated, before: deadTest });
  if (energisingOf(step, sheet) === 'mains') return energisingGate(facts, { rigSimulated });
  return { open: true, reasons: [] };
}

/**
 * The first step of a recorded run that a safety gate should have kept from happening, or undefined.
 *
 * Gate 1: dead tests before power, walked through in the order of the log. Gate 2: every energised step has a caution of
 * its own, answered yes, since the energised step before it. The bench asks before each step; the server asks here again,
 * for a log may come from anywhere. `facts` are those from before the run.
 */
export function runGateBreach(
  run: SettledRun,
  script: Script,
  sheet: Sheet,
  facts: UnitFacts,
): { stepId: string; reasons: string[]; remedy: string | undefined } | undefined {
  const events = [...facts.events];
  let cautioned = false;
  for (const result of run.log.steps) {
    const step = script.steps.find((one) => one.id === result.stepId);
    if (!step) return { stepId: result.stepId, reasons: ['the script has no such step'], remedy: undefined };
    if (result.kind === 'caution') cautioned = result.answer === 'yes';
    else if (result.kind !== 'skipped') {
      if (result.kind !== step.kind)
        return { stepId: step.id, reasons: [`the log calls it ${result.kind}, the script ${step.kind}`], remedy: undefined };
      if (energisingOf(step, sheet) !== 'dead') {
        if (!cautioned)
          return { stepId: step.id, reasons: ['its caution was not answered with yes'], remedy: 'run it again from its caution' };
        if (usesCaution(step)) cautioned = false;
      }
      const gate = stepGate(step, sheet, { ...facts, events }, run.log.rig.simulated);
      if (!gate.open) return { stepId: step.id, reasons: gate.reasons, remedy: gate.remedy };
    }
    events.push(...run.events.filter((event) => event.stepId === result.stepId));
  }
  return undefined;
}
