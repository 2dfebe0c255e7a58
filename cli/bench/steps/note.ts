import { resultBase, skipped, type StepRunner } from '../bench.js';

/** Asks for a line of text. */
export const runNote: StepRunner<'note'> = async (step, bench, start) => {
  const text = await bench.technician.remarks(step.id, step.title);
  if (text === '') return { result: skipped(step, bench, 'nothing to remark', start.startedAt) };
  return { result: { ...resultBase(step, bench, start), kind: 'note', text } };
};
