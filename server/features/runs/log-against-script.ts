import { z } from 'zod';
import { holdsFile, type RunLog, type StepResult } from '../../../shared/script/run-log.js';
import type { Script, Step } from '../../../shared/script/schema.js';
import { CLEAR_CODES } from '../../../shared/readiness/no-code.js';
import type { Fault } from '../../errors.js';

/** The capture that an expect step must have looked at: the newest that its `of` step left before it. */
const captureOf = (log: RunLog, stepId: string, before: number): string | undefined => {
  const result = log.steps.slice(0, before).findLast((one) => one.stepId === stepId && one.kind === 'capture');
  return result?.kind === 'capture' ? result.captureId : undefined;
};

function faultOf(log: RunLog, result: StepResult, index: number, step: Step): { member: string; reason: string } | undefined {
  if (result.kind === 'measure' && step.kind === 'measure' && result.reading.checkId !== step.check) {
    return { member: 'reading/checkId', reason: `the script measures ${step.check} here` };
  }
  if (result.kind === 'inspect' && step.kind === 'inspect' && result.inspection.checkId !== step.check) {
    return {
      member: 'inspection/checkId',
      reason: step.check === undefined ? 'the script asks a question of its own here' : `the script inspects ${step.check} here`,
    };
  }
  if (result.kind === 'expect' && step.kind === 'expect') {
    if (result.expected !== step.code) return { member: 'expected', reason: `the script expects ${step.code} here` };
    if (result.captureId !== captureOf(log, step.of, index))
      return { member: 'captureId', reason: `the script looks at the capture of step ${step.of} here` };
  }
  if (result.kind === 'clear' && result.procedure !== CLEAR_CODES)
    return { member: 'procedure', reason: `the script clears by ${CLEAR_CODES} here` };
  if ((result.kind === 'capture' || result.kind === 'watch' || result.kind === 'cut') && !z.uuid().safeParse(result.captureId).success)
    return { member: 'captureId', reason: 'is no UUID' };
  return undefined;
}

/**
 * Where a bench log says something else than the script that it carries. The gates look at the script's steps and the history keeps
 * the log's results: the two must be about the same check, or a measurement on mains could pass for one on a dead machine.
 */
export function logFaults(log: RunLog, script: Script): Fault[] {
  const faults: Fault[] = [];
  if (log.script.name !== script.name) faults.push({ pointer: '/script/name', reason: `the script calls itself ${script.name}` });
  if (log.script.prove !== script.prove)
    faults.push({ pointer: '/script/prove', reason: `the script says prove: ${String(script.prove)}` });
  if (Date.parse(log.endedAt) < Date.parse(log.startedAt)) faults.push({ pointer: '/endedAt', reason: 'lies before the start' });
  log.people.forEach(({ steps }, index) => {
    const before = log.people[index - 1]?.steps ?? 0;
    if (steps < before || steps > log.steps.length)
      faults.push({ pointer: `/people/${String(index)}/steps`, reason: 'lies outside what the log holds, or before the one before it' });
  });
  const captures = new Set<string>();
  (log.damages ?? []).forEach(({ steps, found }, index) => {
    const pointer = `/damages/${String(index)}`;
    if (steps > log.steps.length) faults.push({ pointer: `${pointer}/steps`, reason: 'lies outside what the log holds' });
    for (const result of found) {
      if (!holdsFile(result)) continue;
      if (!z.uuid().safeParse(result.captureId).success) faults.push({ pointer: `${pointer}/found`, reason: 'a captureId is no UUID' });
      if (captures.has(result.captureId)) faults.push({ pointer: `${pointer}/found`, reason: 'a captureId stands twice in this log' });
      captures.add(result.captureId);
    }
  });
  log.steps.forEach((result, index) => {
    const step = script.steps.find(({ id }) => id === result.stepId);
    const fault = step && faultOf(log, result, index, step);
    if (fault) faults.push({ pointer: `/steps/${String(index)}/${fault.member}`, reason: fault.reason });
    if (result.kind === 'capture' || result.kind === 'watch' || result.kind === 'cut') {
      if (captures.has(result.captureId)) faults.push({ pointer: `/steps/${String(index)}/captureId`, reason: 'stands twice in this log' });
      captures.add(result.captureId);
    }
  });
  return faults;
}
