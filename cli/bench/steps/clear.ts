import { CLEAR_CODES } from '../../../shared/readiness/no-code.js';
import { resultBase, skipped, type StepRunner } from '../bench.js';
import { procedureLines } from '../procedure-lines.js';

/** Clears the stored codes by the sheet's procedure. */
export const runClear: StepRunner<'clear'> = async (step, bench, start) => {
  bench.say(...procedureLines(CLEAR_CODES, undefined, bench));
  if (!(await bench.technician.hasDone(step.id, 'clear', 'Cleared?')))
    return { result: skipped(step, bench, 'the codes were not cleared', start.startedAt) };
  return { result: { ...resultBase(step, bench, start), kind: 'clear', procedure: CLEAR_CODES } };
};
