import type { StepResult } from '../../shared/script/run-log.js';
import { isJudged } from '../../shared/script/run-verdict.js';
import type { Script, Step, StepKind, StepOf } from '../../shared/script/schema.js';
import type { Context } from '../context.js';
import type { OpenRig } from '../instruments/rig.js';
import type { Style } from '../output.js';
import type { Technician } from './technician.js';
import type { UnitOnBench } from './unit-on-bench.js';

/** What a step of a bench run works with. */
export interface Bench {
  readonly context: Context;
  readonly unit: UnitOnBench;
  readonly script: Script;
  readonly rig: OpenRig;
  readonly technician: Technician;
  /** How standard error is dressed. */
  readonly style: Style;
  /** What the run recorded so far, capture files included. */
  readonly results: readonly StepResult[];
  /** Lines for people, on standard error. */
  say(...lines: string[]): void;
  /** The technician covers the sensors one by one before the first capture of a run on a real rig. */
  checkSensors(): Promise<void>;
}

/** What a step came to, and what that means for the rest. */
export interface StepOutcome {
  result: StepResult;
  /** `skip`: a caution was answered with no. `stop`: the technician leaves; the run is closed as interrupted. */
  rest?: 'skip' | 'stop';
  /** Why, for a rest that is skipped. */
  why?: string;
}

/** When the step began, and the id of the capture that it records, if it does. */
export interface StepStart {
  startedAt: string;
  captureId: string;
}

export type StepRunner<K extends StepKind> = (step: StepOf<K>, bench: Bench, start: StepStart) => Promise<StepOutcome>;

/** What all results of a step share; it ends now. */
export function resultBase(step: Step, { context }: Pick<Bench, 'context'>, { startedAt }: Pick<StepStart, 'startedAt'>) {
  return { stepId: step.id, title: step.title, startedAt, endedAt: context.now().toISOString() };
}

export function skipped(
  step: Step,
  bench: Pick<Bench, 'context'>,
  reason: string,
  startedAt: string = bench.context.now().toISOString(),
): StepResult {
  return { ...resultBase(step, bench, { startedAt }), kind: 'skipped', stepKind: step.kind, judged: isJudged(step), reason };
}
