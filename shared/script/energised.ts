import type { Check, DeadTest, MeasuredCheck, Sheet } from '../sheet/schema.js';
import type { Step } from './schema.js';

export const checkOf = (sheet: Sheet, checkId: string | undefined): Check | undefined => sheet.checks.find((check) => check.id === checkId);

/** What a step does to the machine: `mains` puts it on the supply, `test voltage` is an insulation test, `dead` leaves it isolated. */
export type Energising = 'mains' | 'test voltage' | 'dead';

/**
 * What measuring a check does to the machine. An insulation test puts some hundred volts on it, by whichever of its two marks a sheet
 * calls it one; any other check says itself whether it is measured on mains.
 *
 * @example energisingOfCheck({ kind: 'measure', condition: 'dead', quantity: 'insulation resistance', … }) // 'test voltage'
 */
export function energisingOfCheck(check: MeasuredCheck): Energising {
  if (check.deadTest === 'insulation' || check.quantity === 'insulation resistance') return 'test voltage';
  return check.condition === 'energised' ? 'mains' : 'dead';
}

/**
 * Whether a step energises the machine. Captures and watches need the control to run; a measured check says so itself;
 * an insulation test at 500 V is energised too (gate 2), though it is one of the dead tests.
 */
export function energisingOf(step: Step, sheet: Sheet): Energising {
  if (step.kind === 'capture' || step.kind === 'watch') return 'mains';
  if (step.kind === 'clear') return 'mains';
  if (step.kind === 'instruct' && step.procedure !== undefined) return 'mains';
  if (step.kind !== 'measure') return 'dead';
  const check = checkOf(sheet, step.check);
  return check?.kind === 'measure' ? energisingOfCheck(check) : 'dead';
}

/** The dead test that a step is, if it is one. */
export const deadTestOfStep = (step: Step, sheet: Sheet): DeadTest | undefined =>
  step.kind === 'measure' || step.kind === 'inspect' ? checkOf(sheet, step.check)?.deadTest : undefined;

/**
 * Whether an energised step uses its caution up. An instruction shares the caution of the step it prepares
 * (service mode, then the capture); everything else that energises has a caution of its own (gate 2).
 */
export const usesCaution = (step: Step): boolean => step.kind !== 'instruct';
