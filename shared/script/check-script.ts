import { CLEAR_CODES } from '../readiness/no-code.js';
import type { Sheet } from '../sheet/schema.js';
import { checkOf, energisingOf, usesCaution } from './energised.js';
import type { Script } from './schema.js';

export interface ScriptFinding {
  /** The step's id, or undefined for the script as a whole. */
  step: string | undefined;
  reason: string;
}

/**
 * What is wrong with a bench script for a service sheet; empty when nothing is.
 *
 * Beside names that must exist, gate 2 is proved here before anything runs: each energised step has a caution of its own
 * before it, and an insulation test is followed by a discharge.
 *
 * @example checkScript(script, heron) // [{ step: 'lamps', reason: 'an energised step needs a caution of its own before it' }]
 */
export function checkScript(script: Script, sheet: Sheet): ScriptFinding[] {
  const findings: ScriptFinding[] = [];
  const seen = new Set<string>();
  const captures = new Set<string>();
  let cautioned = false;
  const say = (step: string | undefined, reason: string): void => void findings.push({ step, reason });

  if (script.family !== sheet.family) say(undefined, `the script is for ${script.family}, the sheet for ${sheet.family}`);
  script.steps.forEach((step, index) => {
    if (seen.has(step.id)) say(step.id, 'the id stands twice');
    seen.add(step.id);

    const check = step.kind === 'measure' || step.kind === 'inspect' ? checkOf(sheet, step.check) : undefined;
    if (step.kind === 'measure' && check?.kind !== 'measure') say(step.id, `the sheet has no measured check '${step.check}'`);
    if (step.kind === 'inspect' && step.check !== undefined && check?.kind !== 'inspect')
      say(step.id, `the sheet has no inspection '${step.check}'`);
    if (step.kind === 'inspect' && step.check === undefined && !step.question) say(step.id, 'an inspection needs a check or a question');
    if (step.kind === 'instruct' && step.text === undefined && step.procedure === undefined)
      say(step.id, 'an instruction needs a text or a procedure');
    const procedure = step.kind === 'instruct' ? step.procedure : step.kind === 'clear' ? CLEAR_CODES : undefined;
    if (procedure !== undefined && !sheet.procedures.some(({ id }) => id === procedure))
      say(step.id, `the sheet has no procedure '${procedure}'`);
    if (step.kind === 'expect' && !captures.has(step.of)) say(step.id, `no capture step '${step.of}' stands before it`);
    if (step.kind === 'watch' && step.calibration && !sheet.calibration) say(step.id, 'the sheet has no calibration');
    if (step.kind === 'watch' && !step.calibration && (!step.begins || !step.ends || !step.withinS))
      say(step.id, 'a watch needs begins, ends and withinS, or calibration: true');
    if (step.kind === 'capture') captures.add(step.id);

    if (step.kind === 'caution') cautioned = true;
    else if (energisingOf(step, sheet) !== 'dead') {
      if (!cautioned) say(step.id, 'an energised step needs a caution of its own before it');
      if (usesCaution(step)) cautioned = false;
      const next = script.steps[index + 1];
      if (energisingOf(step, sheet) === 'test voltage' && !(next?.kind === 'instruct' && next.discharge))
        say(step.id, 'an insulation test ends with an instruct step that has discharge: true');
    }
  });
  return findings;
}
