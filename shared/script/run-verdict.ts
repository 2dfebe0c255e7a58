import { worstVerdict, type Verdict } from '../verdict.js';
import type { StepResult } from './run-log.js';
import type { Step } from './schema.js';

/** Steps that judge nothing when they are left out: a remark, and a repair that is optional. Any other skipped step is not done. */
export const isJudged = (step: Step): boolean => step.kind !== 'note' && !(step.kind === 'repair' && step.optional === true);

/** The verdict of one step's result; undefined for a step that judges nothing (a caution, a note). */
export function stepVerdict(result: StepResult): Verdict | undefined {
  switch (result.kind) {
    case 'inspect':
      return result.inspection.verdict;
    case 'measure':
      return result.reading.judgement.verdict;
    case 'expect':
      return result.verdict;
    case 'watch':
      return result.watched.verdict;
    case 'skipped':
      return result.judged ? 'not done' : undefined;
    case 'caution':
      return result.answer === 'no' ? 'not done' : undefined;
    case 'instruct':
      return result.answer === 'not done' ? 'not done' : undefined;
    case 'capture':
    case 'cut':
    case 'repair':
    case 'clear':
    case 'note':
      return undefined;
  }
}

/**
 * The verdict of a bench run: the worst of its judged steps (gate 3). A run that judged nothing is inconclusive,
 * and one that was stopped is at best not done.
 */
export function runVerdict(steps: readonly StepResult[], interrupted: boolean): Verdict {
  const verdicts = steps.map(stepVerdict).filter((verdict) => verdict !== undefined);
  return worstVerdict(interrupted ? [...verdicts, 'not done'] : verdicts);
}
