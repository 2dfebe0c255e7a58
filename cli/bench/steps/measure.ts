import { BadInputError } from '../../../shared/errors.js';
import { checkOf } from '../../../shared/script/energised.js';
import { indented } from '../../render/columns.js';
import { readingLines } from '../../render/reading-lines.js';
import { resultBase, skipped, type StepRunner } from '../bench.js';
import { takeReading } from '../take-reading.js';

/** A check of the sheet that is measured. What is no reading is never recorded: the engine offers the step again. */
export const runMeasure: StepRunner<'measure'> = async (step, bench, start) => {
  const { sheet } = bench.unit;
  const check = checkOf(sheet, step.check);
  if (check?.kind !== 'measure') throw new BadInputError(`the sheet has no measured check '${step.check}'`);
  const meter = bench.rig.meterInfo(check.quantity);
  if (bench.technician.attended) {
    bench.say(...indented(check.cautions, bench.style.columns).map((line) => bench.style.ink.bold(line)));
    if (meter && !(await bench.technician.hasDone(step.id, 'measure', `${meter.id}: probes on?`)))
      return { result: skipped(step, bench, 'the probes were not put on', start.startedAt) };
  }
  const reading = await takeReading(check, sheet, bench.rig, bench.technician, step.id);
  if (bench.technician.attended) bench.say(...readingLines(reading, check, bench.style));
  return { result: { ...resultBase(step, bench, start), kind: 'measure', reading } };
};
