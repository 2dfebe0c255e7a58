import { settleRun } from '../../shared/history/settle-run.js';
import type { GateState } from '../../shared/readiness/gates.js';
import { stepGate } from '../../shared/readiness/run-gates.js';
import { energisingOf } from '../../shared/script/energised.js';
import type { StepResult } from '../../shared/script/run-log.js';
import type { Script, Step } from '../../shared/script/schema.js';
import type { Context } from '../context.js';
import { StoppedError } from '../errors.js';
import { EXIT } from '../exit-codes.js';
import { InstrumentError } from '../instruments/instrument-error.js';
import type { OpenRig } from '../instruments/rig.js';
import type { RunJournal } from '../journal/run-journal.js';
import { wordsOf } from '../report-error.js';
import { stepLines } from '../render/step-lines.js';
import { skipped, type Bench } from './bench.js';
import { checkSensors } from './sensor-check.js';
import { runStep } from './steps/step-runners.js';
import type { Technician } from './technician.js';
import type { UnitOnBench } from './unit-on-bench.js';

export interface RunParts {
  context: Context;
  unit: UnitOnBench;
  script: Script;
  scriptText: string;
  rig: OpenRig;
  technician: Technician;
  journal: RunJournal;
}

export interface RunEnd {
  results: StepResult[];
  /** Stopped before its last step. */
  interrupted: boolean;
  /** What beside the verdict decides the exit code: an instrument that failed, Ctrl-C. */
  exitCode: number;
}

/**
 * Goes through the steps of a script. Each step's result is in the journal before the next begins; before a step that energises the
 * machine the safety gates are asked. Ends by itself, by a `no`, by `q`, by Ctrl-C, or by an instrument that fails; the caller closes the journal.
 */
export async function runScript(parts: RunParts): Promise<RunEnd> {
  const { context, unit, script, rig, technician, journal } = parts;
  const { stderr } = context;
  const results: StepResult[] = [];
  const style = await stderr.style();
  let sensorsChecked = rig.simulated;
  const bench: Bench = {
    context,
    unit,
    script,
    rig,
    technician,
    style,
    results,
    say: (...lines) => lines.forEach((line) => stderr.write(`${line}\n`)),
    async checkSensors() {
      if (sensorsChecked) return;
      await checkSensors(context, rig, unit.sheet);
      sensorsChecked = true;
    },
  };
  const record = (result: StepResult): void => {
    journal.record(result);
    results.push(result);
    // What a person has just answered stands on the screen already, with its time.
    const onScreen = technician.attended && (result.kind === 'caution' || result.kind === 'instruct');
    if (!onScreen) bench.say(...stepLines(results.length, result, style));
  };
  const gate = (step: Step): GateState =>
    stepGate(step, unit.sheet, { ...unit.facts, events: [...unit.facts.events, ...eventsSoFar(parts, results)] }, rig.simulated);

  let skipRest: string | undefined;
  let shut: GateState | undefined;
  for (const [index, step] of script.steps.entries()) {
    if (context.interruption.interrupted) return { results, interrupted: true, exitCode: EXIT.stopped };
    if (skipRest !== undefined) {
      record(skipped(step, bench, skipRest));
      continue;
    }
    // Nobody is told to switch on for a step that a gate keeps from happening: a caution shares the fate of what it is for.
    const asked = energisedStepsOf(step, script.steps.slice(index), unit);
    const closed = asked.map((one) => (isDeadTest(one, unit.sheet) ? gate(one) : (shut ?? gate(one)))).find(({ open }) => !open);
    if (closed) {
      if (closed !== shut)
        stderr.say(
          `A safety gate is shut: ${closed.reasons.join('; ')}.${closed.remedy === undefined ? '' : `\nTo open it: ${closed.remedy}.`}`,
        );
      if (asked.some((one) => !isDeadTest(one, unit.sheet))) shut = closed;
      record(skipped(step, bench, `a safety gate is shut: ${closed.reasons.join('; ')}`));
      continue;
    }

    const outcome = await tryStep(step, index, bench, parts);
    if (outcome === 'stopped') return { results, interrupted: true, exitCode: EXIT.stopped };
    if (outcome === 'left') return { results, interrupted: true, exitCode: EXIT.good };
    if (outcome === 'instrument') return { results, interrupted: true, exitCode: EXIT.instrument };
    record(outcome.result);
    if (outcome.rest === 'stop')
      return {
        results,
        interrupted: index < script.steps.length - 1,
        exitCode: context.interruption.interrupted ? EXIT.stopped : EXIT.good,
      };
    if (outcome.rest === 'skip') skipRest = outcome.why ?? 'the run ended before it';
  }
  return { results, interrupted: false, exitCode: EXIT.good };
}

/** The energised steps that a step stands for: itself, or for a caution those up to the next caution. */
function energisedStepsOf(step: Step, fromHere: readonly Step[], { sheet }: UnitOnBench): Step[] {
  const energised = (one: Step): boolean => energisingOf(one, sheet) !== 'dead';
  if (step.kind !== 'caution') return energised(step) || isDeadTest(step, sheet) ? [step] : [];
  const next = fromHere.findIndex((one, index) => index > 0 && one.kind === 'caution');
  return fromHere.slice(1, next < 0 ? undefined : next).filter(energised);
}

const isDeadTest = (step: Step, sheet: UnitOnBench['sheet']): boolean =>
  (step.kind === 'measure' || step.kind === 'inspect') && sheet.checks.find(({ id }) => id === step.check)?.deadTest !== undefined;

/** The events of the run up to now, as the server will see them. */
function eventsSoFar({ context, unit, script, journal }: RunParts, results: readonly StepResult[]) {
  const { id, startedAt, rig, script: about } = journal.header;
  const log = {
    id,
    script: about,
    rig,
    startedAt,
    endedAt: context.now().toISOString(),
    interrupted: true,
    people: [],
    steps: [...results],
  };
  return settleRun(log, script, unit.sheet, unit.by, () => context.newId()).events.filter((event) => event.kind !== 'run ended');
}

/** Runs one step; after an instrument's failure a person may try it again. */
async function tryStep(
  step: Step,
  index: number,
  bench: Bench,
  { context, technician, journal }: RunParts,
): Promise<Awaited<ReturnType<typeof runStep>> | 'stopped' | 'left' | 'instrument'> {
  for (;;) {
    const start = { startedAt: context.now().toISOString(), captureId: context.newId() };
    const records = step.kind === 'capture' || step.kind === 'watch';
    journal.begin({
      stepId: step.id,
      kind: step.kind,
      title: step.title,
      at: start.startedAt,
      ...(records ? { captureId: start.captureId } : {}),
    });
    if ((technician.attended && step.kind !== 'expect') || records)
      bench.say(bench.style.ink.bold(`${String(index + 1).padStart(2)} ${step.kind.padEnd(8)} ${step.title}`));
    try {
      return await runStep(step, bench, start);
    } catch (error) {
      if (error instanceof StoppedError) return context.interruption.interrupted ? 'stopped' : 'left';
      if (!(error instanceof InstrumentError)) throw error;
      bench.say(
        ...wordsOf(error)
          .split('\n')
          .map((line) => `           ${line}`),
        '           Nothing was recorded for this step.',
      );
      try {
        if (!(technician.attended && (await technician.triesAgain(step.id, 'Try this step again?')))) return 'instrument';
      } catch (answer) {
        if (answer instanceof StoppedError) return 'stopped';
        throw answer;
      }
    }
  }
}
