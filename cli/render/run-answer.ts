import { stepVerdict } from '../../shared/script/run-verdict.js';
import type { StepResult } from '../../shared/script/run-log.js';
import type { Verdict } from '../../shared/verdict.js';
import type { RunStop } from '../journal/run-journal.js';

/** A run as `--json` tells it, of whichever command. */
export const runAnswer = (run: {
  id: string;
  unit: number;
  script: string;
  verdict: Verdict;
  sent: boolean;
  left?: RunStop['how'] | undefined;
  results: readonly StepResult[];
}) => ({
  run: run.id,
  unit: run.unit,
  script: run.script,
  verdict: run.verdict,
  sent: run.sent,
  ...(run.left === undefined ? {} : { left: run.left }),
  steps: run.results.map((result) => ({ id: result.stepId, kind: result.kind, title: result.title, verdict: stepVerdict(result) ?? null })),
});
