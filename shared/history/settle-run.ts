import { BadInputError } from '../errors.js';
import { decodeCapture, isReadable } from '../decode/decode-capture.js';
import { viewCapture } from '../decode/view-capture.js';
import type { Capture } from '../lamps/capture.js';
import { readCapture } from '../lamps/read-capture.js';
import { isDischargedAfter } from '../script/charge.js';
import { judgeExpectation } from '../script/judge-expect.js';
import { holesOf } from '../lamps/holes.js';
import { judgeWatch, watchSpec } from '../script/judge-watch.js';
import { peopleOf, type RunLog, type StepResult } from '../script/run-log.js';
import { isJudged, runVerdict } from '../script/run-verdict.js';
import { mayShut } from '../readiness/gates.js';
import type { Script } from '../script/schema.js';
import type { Sheet } from '../sheet/schema.js';
import type { CaptureBody, PersonRef, UnitEvent } from './events.js';
import { settleInspection, settleReading } from './settle-reading.js';

/** What is kept of a capture beside its file: its header's word on itself, and the decoder's answer. */
export function captureBody(capture: Capture, sheet: Sheet, about: { captureId: string; fromFile: boolean }): CaptureBody {
  const { header } = capture;
  return {
    captureId: about.captureId,
    source: header.source,
    capturedAt: header.capturedAt,
    fromFile: about.fromFile,
    ...(header.unit === undefined ? {} : { headerUnit: String(header.unit) }),
    family: sheet.family,
    sheetEdition: sheet.edition,
    answer: decodeCapture(capture, sheet),
  };
}

export interface SettledRun {
  log: RunLog;
  verdict: ReturnType<typeof runVerdict>;
  events: UnitEvent[];
  /** The capture files of the run, by capture id. */
  captures: { id: string; file: string; body: CaptureBody }[];
  /** What was found behind damage of the journal, by the number of steps before it: among `events`, too. */
  evidence: { steps: number; events: UnitEvent[] }[];
}

/** What leaves an event by itself. An expectation looks at another step, and what a person answered is no evidence of the machine. */
const LEAVES_EVIDENCE: readonly StepResult['kind'][] = ['measure', 'inspect', 'capture', 'cut', 'watch', 'repair'];

/** Evidence that no gate was asked for opens nothing: only what may shut one, and lamps that prove no "no code". */
const speaksAgainst = (event: UnitEvent): boolean =>
  mayShut(event) ||
  (event.kind === 'capture' && (event.capture.answer.codes.length > 0 || !isReadable(event.capture.answer))) ||
  (event.kind === 'calibration' && event.calibration.verdict !== 'pass');

/**
 * Makes a bench log into what the shop believes: every capture is decoded again, every reading judged again by the sheet's limits,
 * every expectation and watch looked at again; then the events that the unit's history keeps.
 *
 * Used by the bench (to ask the safety gates as it goes) and by the server (to store), so both come to the same words.
 * `by` is who began the run; what a step left is by the person of that step, and everybody of the log stands at the run's end.
 * `newId` makes the events' ids. Refuses (BadInputError) a log that contradicts the sheet or holds a broken capture.
 */
export function settleRun(log: RunLog, script: Script, sheet: Sheet, by: PersonRef, newId: () => string): SettledRun {
  const bodies = new Map<string, CaptureBody>();
  const captures: SettledRun['captures'] = [];
  const events: UnitEvent[] = [];
  const simulated = log.rig.simulated;
  const { everybody, doer } = peopleOf(log, by);
  const base = (at: string, person: PersonRef) => ({ id: newId(), at, by: person, simulated, runId: log.id });
  const ofStep = (result: StepResult, simulatedSource = false) => ({
    ...base(result.endedAt, doer(result.by)),
    simulated: simulated || simulatedSource,
    stepId: result.stepId,
  });

  events.push({ ...base(log.startedAt, by), kind: 'run began', script: script.name, prove: script.prove });
  const keepCapture = (result: { captureId: string; file: string; endedAt: string; stepId: string }, fromFile: boolean): Capture => {
    const capture = readCapture(result.file, result.captureId);
    const body = captureBody(capture, sheet, { captureId: result.captureId, fromFile });
    bodies.set(result.captureId, body);
    captures.push({ id: result.captureId, file: result.file, body });
    return capture;
  };

  const evidence: SettledRun['evidence'] = [];
  const takeEvidence = (place: number): void => {
    for (const { steps: before, found, line, reason } of log.damages ?? []) {
      if (before !== place) continue;
      const { damages: _damages, ...rest } = log;
      const whole = found.filter(({ kind }) => LEAVES_EVIDENCE.includes(kind));
      const settled = settleRun({ ...rest, interrupted: true, steps: whole }, script, sheet, by, newId);
      captures.push(...settled.captures);
      const against = settled.events.filter(speaksAgainst);
      const at = log.steps[place - 1]?.endedAt ?? log.startedAt;
      const text = `Line ${line} of the journal of ${script.name} was damaged: ${reason}. What stood behind it was not taken for done (step results that are kept as evidence: ${found.length}).`;
      events.push({ ...base(at, by), kind: 'note', text }, ...against);
      evidence.push({ steps: place, events: against });
    }
  };

  const steps = log.steps.map((result, index): StepResult => {
    takeEvidence(index);
    switch (result.kind) {
      case 'measure': {
        // Whether it was discharged is what the log's own steps say, never the sender.
        const { undischarged: _told, ...told } = result.reading;
        const open = isDischargedAfter(log.steps, index, script, sheet) ? {} : ({ undischarged: true } as const);
        const reading = settleReading({ ...told, ...open }, sheet);
        events.push({ ...ofStep(result), kind: 'reading', reading });
        return { ...result, reading };
      }
      case 'inspect': {
        const inspection = settleInspection(result.inspection, sheet);
        events.push({ ...ofStep(result), kind: 'inspection', inspection });
        return { ...result, inspection };
      }
      case 'capture': {
        keepCapture(result, result.fromFile);
        const body = bodies.get(result.captureId) as CaptureBody;
        events.push({ ...ofStep(result, body.source === 'simulated'), kind: 'capture', capture: body });
        return result;
      }
      case 'cut': {
        keepCapture(result, false);
        const body = bodies.get(result.captureId) as CaptureBody;
        const watched = script.steps.find((one) => one.id === result.stepId)?.kind === 'watch';
        if (!watched || body.answer.codes.length > 0)
          events.push({ ...ofStep(result, body.source === 'simulated'), kind: 'capture', capture: body });
        return result;
      }
      case 'expect': {
        const body = bodies.get(result.captureId);
        if (!body) throw new BadInputError(`step '${result.stepId}' looks at a capture that the log does not hold`);
        return { ...result, ...judgeExpectation(result.expected, body.answer, sheet) };
      }
      case 'watch': {
        const step = script.steps.find((one) => one.id === result.stepId);
        if (step?.kind !== 'watch') throw new BadInputError(`the script has no watch step '${result.stepId}'`);
        const capture = keepCapture(result, false);
        const body = bodies.get(result.captureId) as CaptureBody;
        const { seconds, verdict, reason } = judgeWatch(
          viewCapture(capture, sheet),
          watchSpec(step, sheet),
          body.answer.durationS,
          holesOf(capture),
        );
        const { capturedAt, headerUnit } = body;
        const watched = {
          seconds,
          verdict,
          reason,
          captureId: result.captureId,
          capturedAt,
          ...(headerUnit === undefined ? {} : { headerUnit }),
        };
        const event = ofStep(result, body.source === 'simulated');
        if (step.calibration) events.push({ ...event, kind: 'calibration', calibration: watched });
        // Every capture counts for gate 4: a code that blinks while something else is watched for is a code.
        if (body.answer.codes.length > 0) events.push({ ...event, id: newId(), kind: 'capture', capture: body });
        return { ...result, calibration: step.calibration === true, watched };
      }
      case 'repair':
        events.push({ ...ofStep(result), kind: 'repair', repair: result.repair });
        return result;
      case 'clear':
        events.push({ ...ofStep(result), kind: 'codes cleared', procedure: result.procedure });
        return result;
      case 'note':
        events.push({ ...ofStep(result), kind: 'note', text: result.text });
        return result;
      case 'skipped': {
        // Whether a skipped step counts is the script's word, never the sender's.
        const step = script.steps.find((one) => one.id === result.stepId);
        return step ? { ...result, stepKind: step.kind, judged: isJudged(step) } : { ...result, judged: true };
      }
      case 'caution':
      case 'instruct':
        return result;
    }
  });

  takeEvidence(log.steps.length);

  const missing = script.steps.filter((step) => !log.steps.some((result) => result.stepId === step.id && result.kind !== 'cut'));
  const verdict = runVerdict(steps, log.interrupted || missing.length > 0);
  events.push({
    ...base(log.endedAt, log.people.at(-1)?.person ?? by),
    kind: 'run ended',
    script: script.name,
    prove: script.prove,
    verdict,
    steps: log.steps.length,
    ...(everybody.length > 1 ? { people: everybody } : {}),
  });
  return { log: { ...log, steps }, verdict, events, captures, evidence };
}
