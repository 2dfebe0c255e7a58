import { decodeCapture } from '../../../shared/decode/decode-capture.js';
import { readCapture } from '../../../shared/lamps/read-capture.js';
import { judgeExpectation } from '../../../shared/script/judge-expect.js';
import { resultBase, skipped, type StepRunner } from '../bench.js';

/** What an earlier capture must have shown: no code, any code, or one code. */
export const runExpect: StepRunner<'expect'> = (step, bench, start) => {
  const capture = bench.results.find((result) => result.stepId === step.of);
  if (capture?.kind !== 'capture')
    return Promise.resolve({ result: skipped(step, bench, `the capture '${step.of}' was not recorded`, start.startedAt) });
  const answer = decodeCapture(readCapture(capture.file), bench.unit.sheet);
  const judged = judgeExpectation(step.code, answer, bench.unit.sheet);
  return Promise.resolve({
    result: { ...resultBase(step, bench, start), kind: 'expect', captureId: capture.captureId, expected: step.code, ...judged },
  });
};
