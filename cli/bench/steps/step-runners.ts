import type { Step, StepKind } from '../../../shared/script/schema.js';
import type { Bench, StepOutcome, StepRunner, StepStart } from '../bench.js';
import { runCapture } from './capture.js';
import { runCaution } from './caution.js';
import { runClear } from './clear.js';
import { runExpect } from './expect.js';
import { runInspect } from './inspect.js';
import { runInstruct } from './instruct.js';
import { runMeasure } from './measure.js';
import { runNote } from './note.js';
import { runRepair } from './repair.js';
import { runWatch } from './watch.js';

/** A file a step kind. A new kind of the script's schema does not compile until it stands here. */
const RUNNERS: { readonly [K in StepKind]: StepRunner<K> } = {
  caution: runCaution,
  instruct: runInstruct,
  inspect: runInspect,
  measure: runMeasure,
  capture: runCapture,
  expect: runExpect,
  watch: runWatch,
  repair: runRepair,
  clear: runClear,
  note: runNote,
};

export function runStep(step: Step, bench: Bench, start: StepStart): Promise<StepOutcome> {
  return (RUNNERS[step.kind] as StepRunner<StepKind>)(step, bench, start);
}
