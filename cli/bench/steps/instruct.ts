import { resultBase, type StepRunner } from '../bench.js';
import { procedureLines } from '../procedure-lines.js';

/** Tells what to do, or walks through a procedure of the sheet; waits for the word that it is done. */
export const runInstruct: StepRunner<'instruct'> = async (step, bench, start) => {
  bench.say(...procedureLines(step.procedure, step.text, bench));
  const done = await bench.technician.hasDone(step.id, 'instruct', 'Done?');
  const result = { ...resultBase(step, bench, start), kind: 'instruct' as const, answer: done ? ('done' as const) : ('not done' as const) };
  // Nothing else is done on a machine that may still hold the test's charge.
  return step.discharge && !done ? { result, rest: 'skip', why: 'the machine was not discharged' } : { result };
};
