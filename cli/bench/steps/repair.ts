import { resultBase, skipped, type StepRunner } from '../bench.js';

/** What was mended: part, where it came from, minutes, cost. */
export const runRepair: StepRunner<'repair'> = async (step, bench, start) => {
  const { parts } = bench.unit.sheet;
  const repair = await bench.technician.mended(step.id, { part: step.part, optional: step.optional === true, parts });
  if (!repair) return { result: skipped(step, bench, 'nothing was mended', start.startedAt) };
  bench.rig.hands?.repaired();
  return { result: { ...resultBase(step, bench, start), kind: 'repair', repair } };
};
