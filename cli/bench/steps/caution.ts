import { cautionLines } from '../../render/caution-lines.js';
import { resultBase, type StepRunner } from '../bench.js';

/** Waits for a person's yes or no; it has no default. No goes to the safe state: the probe stopped, every port closed. */
export const runCaution: StepRunner<'caution'> = async (step, bench, start) => {
  if (!bench.technician.attended) bench.say(...cautionLines(step.text, bench.style));
  const answer = await bench.technician.confirms(step.id, step.text);
  const result = { ...resultBase(step, bench, start), kind: 'caution', answer } as const;
  if (answer === 'yes') return { result };
  await bench.rig.close();
  return { result, rest: 'skip', why: `the caution '${step.title}' was answered with no` };
};
