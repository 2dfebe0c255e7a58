import { resultBase, type StepRunner } from '../bench.js';
import { procedureLines } from '../procedure-lines.js';

/** Tells what to do, or walks through a procedure of the sheet; waits for the word that it is done. */
export const runInstruct: StepRunner<'instruct'> = async (step, bench, start) => {
  bench.say(...procedureLines(step.procedure, step.text, bench));
  const done = await bench.technician.hasDone(step.id, 'instruct', 'Done?');
  return { result: { ...resultBase(step, bench, start), kind: 'instruct', answer: done ? 'done' : 'not done' } };
};
