import { settleInspection } from '../../../shared/history/settle-reading.js';
import { checkOf } from '../../../shared/script/energised.js';
import { resultBase, type StepRunner } from '../bench.js';

/** A check of the sheet that is looked at, or a question of the script's own. */
export const runInspect: StepRunner<'inspect'> = async (step, bench, start) => {
  const { sheet } = bench.unit;
  const check = checkOf(sheet, step.check);
  const question = (check?.kind === 'inspect' ? check.question : undefined) ?? step.question ?? step.title;
  if (!bench.technician.attended) bench.say(`           ${question}`);
  const seen = await bench.technician.looks(step.id, question);
  const inspection = settleInspection({ ...(step.check === undefined ? {} : { checkId: step.check }), title: step.title, ...seen }, sheet);
  return { result: { ...resultBase(step, bench, start), kind: 'inspect', inspection } };
};
