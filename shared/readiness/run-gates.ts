import type { SettledRun } from '../history/settle-run.js';
import { isCharged } from '../script/charge.js';
import { isReturn } from '../script/run-log.js';
import { deadTestOfStep, energisingOf } from '../script/energised.js';
import type { Script, Step, StepOf } from '../script/schema.js';
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
  if (energisingOf(step, sheet) === 'mains') return energisingGate(facts, { rigSimulated });
  const deadTest = deadTestOfStep(step, sheet);
  if (deadTest) return energisingGate(facts, { rigSimulated, before: deadTest });
  return { open: true, reasons: [] };
}

export interface GateBreach {
  stepId: string;
  reasons: string[];
  remedy: string | undefined;
}

/**
 * The first step of a recorded run that a safety gate should have kept from happening, or undefined.
 *
 * The log must follow the script: its steps, each once, in its order. Gate 1: dead tests before power, walked through step by step.
 * Gate 2: the caution that stands before an energised step was answered with yes, and an insulation test was followed by its discharge
 * before anything else was done. Whoever comes back to a run that was broken off answers its caution again: an answer of before
 * counts no longer, and the caution stands in the log once more. So it does where an instrument failed and the step was tried again;
 * the last answer counts. Lamps that were cut stand before their step's own result.
 * The bench asks before each step; the server asks here again, for a log may come from anywhere.
 * `facts` are those from before the run, `script` has passed `checkScript`.
 */
export function runGateBreach(run: SettledRun, script: Script, sheet: Sheet, facts: UnitFacts): GateBreach | undefined {
  const events = [...facts.events];
  const confirmed = new Set<string>();
  const found = new Set(run.evidence.flatMap((one) => one.events));
  let place = -1;
  for (const [position, result] of run.log.steps.entries()) {
    if (run.log.people.some((person) => isReturn(person) && person.steps === position)) confirmed.clear();
    events.push(...run.evidence.flatMap((one) => (one.steps === position ? one.events : [])));
    const breach = (reason: string | string[], remedy?: string): GateBreach => ({
      stepId: result.stepId,
      reasons: [reason].flat(),
      remedy,
    });
    const index = script.steps.findIndex((one) => one.id === result.stepId);
    const step = script.steps[index];
    if (!step) return breach('the script has no such step');
    const askedAgain = result.kind === 'caution' && cautionBefore(script, place + 1)?.id === step.id;
    if (index <= place && !askedAgain) return breach('it stands out of the order of the script, or twice');
    if (result.kind !== 'cut') place = Math.max(place, index);
    if (result.kind === 'skipped') continue;
    const cutShort = result.kind === 'cut' && (step.kind === 'capture' || step.kind === 'watch');
    if (result.kind !== step.kind && !cutShort) return breach(`the log calls it ${result.kind}, the script ${step.kind}`);

    if (isCharged(run.log.steps.slice(0, position), script, sheet) && !(step.kind === 'instruct' && step.discharge))
      return breach('the machine was not discharged after the insulation test', 'discharge it, then run from there');
    if (result.kind === 'caution' && result.answer === 'yes') confirmed.add(step.id);
    else if (result.kind === 'caution') confirmed.delete(step.id);
    const energising = energisingOf(step, sheet);
    const caution = cautionBefore(script, index);
    if (energising !== 'dead' && !(caution && confirmed.has(caution.id)))
      return breach('its caution was not answered with yes', 'run it again from its caution');
    const gate = stepGate(step, sheet, { ...facts, events }, run.log.rig.simulated);
    if (!gate.open) return breach(gate.reasons, gate.remedy);
    events.push(...run.events.filter((event) => event.stepId === result.stepId && !found.has(event)));
  }
  return undefined;
}

/** The caution that stands before this place of the script. */
export const cautionBefore = (script: Script, index: number): StepOf<'caution'> | undefined =>
  script.steps.slice(0, index).findLast((one) => one.kind === 'caution');
