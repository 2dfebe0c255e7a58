import { settleRun } from '../../shared/history/settle-run.js';
import type { GateState } from '../../shared/readiness/gates.js';
import { cautionBefore, stepGate } from '../../shared/readiness/run-gates.js';
import { energisingOf } from '../../shared/script/energised.js';
import type { PersonRef } from '../../shared/history/events.js';
import type { RunDamage, StepResult } from '../../shared/script/run-log.js';
import type { Script, Step } from '../../shared/script/schema.js';
import type { Context } from '../context.js';
import { StoppedError } from '../errors.js';
import { EXIT } from '../exit-codes.js';
import { InstrumentError } from '../instruments/instrument-error.js';
import type { OpenRig } from '../instruments/rig.js';
import { doneIn } from '../journal/open-runs.js';
import { cutOf, type RunJournal, type RunStop } from '../journal/run-journal.js';
import { liveOf } from '../live/live-of.js';
import { wordsOf } from '../report-error.js';
import { stepLines } from '../render/step-lines.js';
import { skipped, type Bench } from './bench.js';
import { checkSensors } from './sensor-check.js';
import { runStep } from './steps/step-runners.js';
import type { Technician } from './technician.js';
import type { UnitOnBench } from './unit-on-bench.js';
import { withRun } from './with-run.js';

export interface RunParts {
  /** What the run recorded before it was broken off, capture files included. */
  before?: readonly StepResult[];
  /** What stands behind damage of its journal: a fail or a repair among it shuts gates here as it will at the server. */
  damages?: readonly RunDamage[];
  /** Who does the steps now; undefined: who began it. */
  person?: PersonRef;
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
  /** How it was left, where it was stopped. */
  left?: RunStop['how'];
  /** What beside the verdict decides the exit code: an instrument that failed, Ctrl-C. */
  exitCode: number;
}

const STOPPED = { interrupted: true, left: 'stopped', exitCode: EXIT.stopped } as const;
const PARKED = { interrupted: true, left: 'parked', exitCode: EXIT.good } as const;
const INSTRUMENT_FAILED = { interrupted: true, left: 'instrument failed', exitCode: EXIT.instrument } as const;

/**
 * Goes through the steps of a script, from the first that is not done. Each step's result is in the journal before the next begins;
 * before a step that energises the machine the safety gates are asked, and after an interruption its caution once more. Ends by itself,
 * by a `no`, by a key that parks, by Ctrl-C, or by an instrument that fails; the caller closes the journal, and says to those who
 * watch that it has ended.
 */
export async function runScript(parts: RunParts): Promise<RunEnd> {
  const { unit, script, rig, journal, before = [], person } = parts;
  liveOf(parts.context).runBegins({ id: journal.header.id, unit, script, rig, before, person });
  return goThrough(parts);
}

async function goThrough(parts: RunParts): Promise<RunEnd> {
  const { context, unit, script, rig, technician, journal } = parts;
  const { stderr } = context;
  const results: StepResult[] = [...(parts.before ?? [])];
  const done = doneIn({ results });
  /** Cautions that were answered with yes since somebody last came to this run. */
  const confirmed = new Set<string>();
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
  const record = (told: StepResult): void => {
    const by = parts.person?.id;
    const result = by === undefined || by === journal.header.by.id ? told : { ...told, by };
    journal.record(result);
    results.push(result);
    liveOf(context).stepEnded(result);
    if (result.kind === 'caution' && result.answer === 'yes') confirmed.add(result.stepId);
    // What a person has just answered stands on the screen already, with its time.
    const onScreen = technician.attended && (result.kind === 'caution' || result.kind === 'instruct');
    if (!onScreen) bench.say(...stepLines(results.length, result, style));
  };
  const gate = (step: Step): GateState =>
    stepGate(step, unit.sheet, { ...unit.facts, events: withRun(unit.facts.events, eventsSoFar(parts, results)) }, rig.simulated);

  let skipRest = whySkipped(script, results);
  let shut: GateState | undefined;
  /**
   * One step with its gate and its caution. After an instrument's failure it is tried again as if for the first time: nobody knows what
   * became of the machine meanwhile.
   */
  const doStep = async (step: Step, index: number): Promise<'done' | 'again' | Omit<RunEnd, 'results'>> => {
    if (skipRest !== undefined) {
      record(skipped(step, bench, skipRest));
      return 'done';
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
      return 'done';
    }

    const caution = energisingOf(step, unit.sheet) === 'dead' ? undefined : cautionBefore(script, index);
    const wasAsked = caution && results.some(({ stepId }) => stepId === caution.id);
    const askedAgain = wasAsked && !confirmed.has(caution.id) ? [caution] : [];
    for (const one of [...askedAgain, step]) {
      const outcome = await tryStep(one, script.steps.indexOf(one), bench, parts, record);
      if (outcome === 'again' && caution) confirmed.delete(caution.id);
      if (outcome === 'again') return 'again';
      if (outcome === 'stopped') return STOPPED;
      if (outcome === 'left') return PARKED;
      if (outcome === 'instrument') return INSTRUMENT_FAILED;
      record(outcome.result);
      if (outcome.rest === 'stop') return context.interruption.interrupted ? STOPPED : PARKED;
      if (outcome.rest !== 'skip') continue;
      skipRest = outcome.why ?? 'the run ended before it';
      if (one !== step) record(skipped(step, bench, skipRest));
      break;
    }
    return 'done';
  };

  for (const [index, step] of script.steps.entries()) {
    if (context.interruption.interrupted) return { results, ...STOPPED };
    if (done.has(step.id)) continue;
    let outcome = await doStep(step, index);
    while (outcome === 'again') outcome = await doStep(step, index);
    if (outcome !== 'done') return { results, ...outcome };
  }
  return { results, interrupted: false, exitCode: EXIT.good };
}

/** Why nothing more is done in a run that had come to its safe state when it was broken off. */
function whySkipped(script: Script, results: readonly StepResult[]): string | undefined {
  const last = results.findLast((result) => result.kind !== 'skipped' && result.kind !== 'cut');
  const step = last && script.steps.find(({ id }) => id === last.stepId);
  if (last?.kind === 'caution' && last.answer === 'no') return `the caution '${last.title}' was answered with no`;
  if (last?.kind === 'instruct' && last.answer === 'not done' && step?.kind === 'instruct' && step.discharge)
    return 'the machine was not discharged';
  return undefined;
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

const byNobody = ({ by: _by, ...result }: StepResult): StepResult => result;

/** The events of the run up to now, as the server will see them. */
function eventsSoFar({ context, unit, script, journal, damages = [] }: RunParts, results: readonly StepResult[]) {
  const { id, startedAt, rig, script: about, by } = journal.header;
  const log = {
    id,
    script: about,
    rig,
    startedAt,
    endedAt: context.now().toISOString(),
    interrupted: true,
    // Who did which step decides no gate.
    people: [],
    damages: damages.map((one) => ({ ...one, found: one.found.map(byNobody) })),
    steps: results.map(byNobody),
  };
  return settleRun(log, script, unit.sheet, by, () => context.newId()).events.filter((event) => event.kind !== 'run ended');
}

/** Runs one step. `again`: an instrument failed, and a person tries it again; lamps that were seen until then are recorded as a cut first. */
async function tryStep(
  step: Step,
  index: number,
  bench: Bench,
  { context, technician, journal }: RunParts,
  record: (result: StepResult) => void,
): Promise<Awaited<ReturnType<typeof runStep>> | 'again' | 'stopped' | 'left' | 'instrument'> {
  const start = { startedAt: context.now().toISOString(), captureId: context.newId() };
  liveOf(context).stepBegins(step.id);
  const records = step.kind === 'capture' || step.kind === 'watch';
  const { id: stepId, kind, title } = step;
  const begun = { stepId, kind, title, at: start.startedAt, ...(records ? { captureId: start.captureId } : {}) };
  journal.begin(begun);
  if ((technician.attended && step.kind !== 'expect') || records)
    bench.say(bench.style.ink.bold(`${String(index + 1).padStart(2)} ${step.kind.padEnd(8)} ${step.title}`));
  try {
    try {
      return await runStep(step, bench, start);
    } catch (error) {
      if (!(error instanceof InstrumentError)) throw error;
      bench.say(
        ...wordsOf(error)
          .split('\n')
          .map((line) => `           ${line}`),
      );
      // A code that the lamps have shown stays shown, whatever the next try brings (gate 4).
      const cut = cutOf(context.home, { begun });
      if (cut) record(cut);
      bench.say(
        cut ? '           The lamps until then are kept; the step itself is not done.' : '           Nothing was recorded for this step.',
      );
      return technician.attended && (await technician.triesAgain(step.id, 'Try this step again?')) ? 'again' : 'instrument';
    }
  } catch (error) {
    if (error instanceof StoppedError) return context.interruption.interrupted ? 'stopped' : 'left';
    throw error;
  }
}
