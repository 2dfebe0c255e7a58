// Bench logs of the demo scripts as a bench would send them: every step done, lamps off the simulated panel.
import { captureHeaderSchema } from '../../shared/lamps/capture.js';
import { codeStates, readyBlinkStates } from '../../shared/lamps/panel-states.js';
import { seededRandom } from '../../shared/lamps/seeded-random.js';
import { simulateLamps, type LampState } from '../../shared/lamps/simulate-lamps.js';
import { endLine, headerLine, sampleLine } from '../../shared/lamps/write-capture.js';
import { judge } from '../../shared/measure/judge.js';
import { parseAccuracy } from '../../shared/measure/parse-accuracy.js';
import type { RunLog, StepResult } from '../../shared/script/run-log.js';
import type { Script } from '../../shared/script/schema.js';
import type { WeightedPhases } from '../../shared/sheet/schema.js';
import { heron } from './unit-facts.js';

export type Panel = 'ready blink' | 'G5K3' | 'calibration';

const ready = heron.ready?.lamps ?? [];
const statesOf: Record<Panel, LampState[]> = {
  'ready blink': [...readyBlinkStates(ready, 26, 0.9), { seconds: 1.5, lit: [] }],
  G5K3: [
    ...readyBlinkStates(ready, 6, 0.9),
    { seconds: 0.7, lit: [] },
    ...codeStates(heron.coding as WeightedPhases, 5, 3, Array<number>(16).fill(1.2)),
    { seconds: 1, lit: [] },
  ],
  calibration: [
    { seconds: 2, lit: [] },
    { seconds: 150, lit: ['lock', 'wash'] },
    { seconds: 6, lit: [] },
  ],
};

/** A capture file of the simulated Heron H6 panel. The source says `probe` unless told, since most tests want a shop's real bench. */
export function captureFile(
  panel: Panel,
  {
    source = 'probe',
    unit,
    capturedAt = '2026-03-03T10:42:00Z',
  }: { source?: 'probe' | 'simulated'; unit?: string; capturedAt?: string } = {},
): string {
  const lamps = heron.lamps.map((lamp) => lamp.id);
  const states = statesOf[panel];
  const header = captureHeaderSchema.parse({
    format: 'refettle.lamps',
    version: 1,
    capturedAt,
    source,
    lamps,
    scale: { unit: 'counts', max: 1023 },
    sampleRateHz: 50,
    ...(unit === undefined ? {} : { unit }),
  });
  const samples = [...simulateLamps(states, { lamps, sampleRateHz: 50, scaleMax: 1023, noise: 0.005 }, seededRandom(7))];
  const endUs = Math.round(states.reduce((sum, state) => sum + state.seconds, 0) * 1e6);
  return headerLine(header) + samples.map(({ timeUs, levels }) => sampleLine(timeUs, levels)).join('') + endLine(endUs);
}

const GOOD: Record<string, { value: number; accuracy: string; resolution: number }> = {
  'protective-conductor': { value: 0.084, accuracy: '2%+5', resolution: 0.001 },
  insulation: { value: 2.31, accuracy: '3%+5', resolution: 0.01 },
  'drain-pump-winding': { value: 157.7, accuracy: '0.5%+3', resolution: 0.1 },
  heater: { value: 26.8, accuracy: '0.5%+3', resolution: 0.1 },
  'inlet-valve-coil': { value: 3820, accuracy: '0.5%+3', resolution: 1 },
  'protective-conductor-current': { value: 1.2, accuracy: '2%+5', resolution: 0.01 },
};

export function readingBody(checkId: string, value = GOOD[checkId]?.value ?? 0): Extract<StepResult, { kind: 'measure' }>['reading'] {
  const check = heron.checks.find((one) => one.id === checkId);
  const meter = GOOD[checkId];
  if (check?.kind !== 'measure' || !meter) throw new Error(`no measured check ${checkId}`);
  const { accuracy, resolution } = meter;
  return {
    checkId,
    title: check.title,
    condition: check.condition,
    ...(check.deadTest ? { deadTest: check.deadTest } : {}),
    source: 'meter',
    instrument: { id: 'M-03', identification: 'Millrace,BM-4,0,1.0' },
    accuracy,
    resolution,
    judgement: judge({ value, unit: check.unit, low: check.low, high: check.high, accuracy: parseAccuracy(accuracy), resolution }),
  };
}

export interface BenchLogOptions {
  id: string;
  script: Script;
  scriptText: string;
  startedAt: string;
  simulated?: boolean;
  /** What the panel shows at each capture or watch step, by step id. */
  panels?: Partial<Record<string, Panel>>;
  /** Values other than the good ones, by check id. */
  values?: Partial<Record<string, number>>;
  /** Changes or drops (undefined) a step's result. */
  change?: (result: StepResult) => StepResult | undefined;
}

/** Short, so that a log sent as soon as it begins is not further ahead of the server's clock than a bench may be. */
const STEP_SECONDS = 20;

/** A whole bench log; steps follow each other without a pause. */
export function benchLog({
  id,
  script,
  scriptText,
  startedAt,
  simulated = false,
  panels = {},
  values = {},
  change = (result) => result,
}: BenchLogOptions): RunLog {
  const at = (steps: number): string => new Date(Date.parse(startedAt) + steps * STEP_SECONDS * 1000).toISOString();
  const source = simulated ? 'simulated' : 'probe';
  const captureIds = new Map<string, string>();
  const steps = script.steps.map((step, index): StepResult => {
    const base = { stepId: step.id, title: step.title, startedAt: at(index), endedAt: at(index + 1) };
    switch (step.kind) {
      case 'caution':
        return { ...base, kind: 'caution', answer: 'yes' };
      case 'instruct':
        return { ...base, kind: 'instruct', answer: 'done' };
      case 'inspect':
        return {
          ...base,
          kind: 'inspect',
          inspection: { ...(step.check === undefined ? {} : { checkId: step.check }), title: step.title, verdict: 'pass' },
        };
      case 'measure':
        return { ...base, kind: 'measure', reading: readingBody(step.check, values[step.check]) };
      case 'capture':
      case 'watch': {
        const captureId = `${id.slice(0, -2)}${String(index).padStart(2, '0')}`;
        captureIds.set(step.id, captureId);
        const panel = panels[step.id] ?? (step.kind === 'watch' ? 'calibration' : script.prove ? 'ready blink' : 'G5K3');
        const file = captureFile(panel, { source, capturedAt: at(index) });
        return step.kind === 'capture'
          ? { ...base, kind: 'capture', captureId, file, fromFile: false }
          : {
              ...base,
              kind: 'watch',
              captureId,
              file,
              calibration: step.calibration === true,
              watched: { seconds: 0, verdict: 'inconclusive', reason: 'for the server to say' },
            };
      }
      case 'expect':
        return {
          ...base,
          kind: 'expect',
          captureId: captureIds.get(step.of) ?? '',
          expected: step.code,
          seen: '',
          verdict: 'inconclusive',
        };
      case 'repair':
        return {
          ...base,
          kind: 'repair',
          repair: { part: step.part ?? 'Drain pump', partSource: { kind: 'new' }, minutes: 30, costMinor: 2450 },
        };
      case 'clear':
        return { ...base, kind: 'clear', procedure: 'clear-codes' };
      case 'note':
        return { ...base, kind: 'note', text: 'nothing' };
    }
  });
  return {
    id,
    script: { name: script.name, title: script.title, prove: script.prove, text: scriptText },
    rig: { name: simulated ? 'sim:heron-mend' : 'bench-2', simulated },
    startedAt,
    endedAt: at(script.steps.length),
    interrupted: false,
    people: [],
    steps: steps.map(change).filter((result) => result !== undefined),
  };
}
