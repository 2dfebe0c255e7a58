// Facts about one invented unit, built event by event: for tests of gates, rules and stages.
import { readFileSync } from 'node:fs';
import { parse } from 'yaml';
import type { DecodeAnswer } from '../../shared/decode/answer.js';
import type { CalibrationBody, CaptureBody, PersonRef, ReadingBody, UnitEvent } from '../../shared/history/events.js';
import { judge } from '../../shared/measure/judge.js';
import type { UnitFacts } from '../../shared/readiness/facts.js';
import { scriptSchema, type Script } from '../../shared/script/schema.js';
import { sheetSchema, type DeadTest, type Sheet } from '../../shared/sheet/schema.js';
import type { Verdict } from '../../shared/verdict.js';

const shopFile = (name: string): unknown => parse(readFileSync(new URL(`../../server/seed/shop/${name}`, import.meta.url), 'utf8'));
export const heron: Sheet = sheetSchema.parse(shopFile('heron-h6.yaml'));
export const shopScript = (name: 'h6-find' | 'h6-mend' | 'h6-prove'): Script => scriptSchema.parse(shopFile(`${name}.yaml`));

export const wil: PersonRef = { id: 'wil', name: 'Wil Tarrow', role: 'technician' };
export const maren: PersonRef = { id: 'maren', name: 'Maren Holt', role: 'lead' };

/** One minute after another, so that each event has its own place in time. */
let minute = 0;
const next = (by: PersonRef, simulated: boolean) => {
  minute += 1;
  return { id: `event-${minute}`, at: new Date(Date.UTC(2026, 2, 3, 9, minute)).toISOString(), by, simulated };
};

interface Options {
  by?: PersonRef;
  simulated?: boolean;
}

export const intake = (): UnitEvent => ({ ...next(wil, false), kind: 'intake', complaint: 'stands full of water' });
export const returned = (): UnitEvent => ({ ...next(wil, false), kind: 'returned', complaint: 'stands full of water again' });
export const sold = (): UnitEvent => ({ ...next(wil, false), kind: 'sold' });

export function inspection(verdict: Verdict = 'pass', { by = wil, simulated = false }: Options = {}): UnitEvent {
  return {
    ...next(by, simulated),
    kind: 'inspection',
    inspection: { checkId: 'visual', title: 'Visual check', deadTest: 'visual', verdict },
  };
}

export function reading(
  checkId: string,
  value: number,
  {
    by = wil,
    simulated = false,
    accuracy = '0.5%+3',
    resolution = 0.01,
    source = 'meter',
  }: Options & { accuracy?: string; resolution?: number; source?: 'meter' | 'typed' } = {},
): UnitEvent {
  const check = heron.checks.find((one) => one.id === checkId);
  if (check?.kind !== 'measure') throw new Error(`no measured check ${checkId}`);
  const [percent, digits] = accuracy.split('%+').map(Number) as [number, number];
  const body: ReadingBody = {
    checkId,
    title: check.title,
    condition: check.condition,
    ...(check.deadTest ? { deadTest: check.deadTest } : {}),
    source,
    accuracy,
    resolution,
    judgement: judge({
      value,
      unit: check.unit,
      low: check.low,
      high: check.high,
      accuracy: { percentOfReading: percent, digits },
      resolution,
    }),
  };
  return { ...next(by, simulated), kind: 'reading', reading: body };
}

const GOOD_VALUES: Record<string, number> = {
  'protective-conductor': 0.08,
  insulation: 2.3,
  'drain-pump-winding': 157.7,
  heater: 26.8,
  'inlet-valve-coil': 3800,
  'protective-conductor-current': 1.2,
};
export const goodReading = (checkId: string, options: Options = {}): UnitEvent => reading(checkId, GOOD_VALUES[checkId] as number, options);

/** The dead tests in their order, all passed. */
export const deadTests = (options: Options = {}): UnitEvent[] => [
  inspection('pass', options),
  goodReading('protective-conductor', options),
  goodReading('insulation', options),
];
export const deadTestNames: readonly DeadTest[] = ['visual', 'protective-conductor', 'insulation'];

export const answer = (over: Partial<DecodeAnswer> = {}): DecodeAnswer => ({
  samples: 2500,
  durationS: 25,
  lost: 0,
  cut: false,
  deadLamps: [],
  segments: [{ kind: 'ready', fromS: 0.5, toS: 24.5 }],
  codes: [],
  warnings: [],
  ...over,
});
export const showsCode = (code: string): DecodeAnswer =>
  answer({
    segments: [
      { kind: 'ready', fromS: 0.5, toS: 5 },
      { kind: 'code', fromS: 6, toS: 25, code, repeats: 8, confidence: 0.9999 },
    ],
    codes: [{ code, repeats: 8, confidence: 0.9999 }],
  });
export const unreadable = (durationS = 25): DecodeAnswer =>
  answer({
    durationS,
    segments: [
      { kind: 'ready', fromS: 0.5, toS: 5 },
      { kind: 'unreadable', fromS: 6, toS: durationS, reason: 'too dim', candidates: [] },
    ],
  });

export function capture(
  given: DecodeAnswer = answer(),
  { by = wil, simulated = false, ...over }: Options & Partial<CaptureBody> = {},
): UnitEvent {
  const base = next(by, simulated);
  return {
    ...base,
    kind: 'capture',
    capture: {
      captureId: base.id,
      source: 'probe',
      capturedAt: base.at,
      fromFile: false,
      family: 'heron-h6',
      sheetEdition: 1,
      answer: given,
      ...over,
    },
  };
}

export const repair = (
  part = 'Drain pump',
  { by = wil, simulated = false, swapped = true }: Options & { swapped?: boolean } = {},
): UnitEvent => ({
  ...next(by, simulated),
  kind: 'repair',
  repair: { part, partSource: swapped ? { kind: 'new' } : { kind: 'none' }, minutes: 30, costMinor: 2450 },
});
export const partRemoved = (): UnitEvent => ({ ...next(wil, false), kind: 'part removed', part: 'Drain pump', toUnit: 413 });
export const cleared = (): UnitEvent => ({ ...next(wil, false), kind: 'codes cleared', procedure: 'clear-codes' });
export const calibration = (
  verdict: Verdict = 'pass',
  { simulated = false, ...over }: Options & Partial<CalibrationBody> = {},
): UnitEvent => ({
  ...next(wil, simulated),
  kind: 'calibration',
  calibration: { seconds: 150, verdict, reason: '2:30, the sheet allows 2:00 to 3:00', ...over },
});
export const runBegan = (prove: boolean): UnitEvent => ({
  ...next(wil, false),
  kind: 'run began',
  script: prove ? 'h6-prove' : 'h6-find',
  prove,
});
export const runEnded = (prove: boolean, verdict: Verdict): UnitEvent => ({
  ...next(wil, false),
  kind: 'run ended',
  script: 'h6-prove',
  prove,
  verdict,
  steps: 3,
});
export const override = (by: PersonRef = maren): UnitEvent => ({
  ...next(by, false),
  kind: 'override',
  gate: 'dead tests',
  reason: 'insulation tester is away, cord was replaced',
});
export const signOff = (tag = '0412-1', by: PersonRef = maren): UnitEvent => ({
  ...next(by, false),
  kind: 'sign-off',
  tag,
  rulesMet: 5,
  fourEyes: true,
});
export const withdrawn = (tag = '0412-1'): UnitEvent => ({ ...next(maren, false), kind: 'tag withdrawn', tag, reason: 'shown wrong' });

/** Everything a mended Heron H6 needs before a lead can sign it. */
export const mendedAndProved = (options: Options = {}): UnitEvent[] => [
  intake(),
  ...deadTests(options),
  capture(showsCode('G5K3'), options),
  repair('Drain pump', options),
  runBegan(true),
  ...deadTests(options),
  goodReading('drain-pump-winding', options),
  goodReading('heater', options),
  goodReading('inlet-valve-coil', options),
  cleared(),
  capture(answer(), options),
  calibration('pass', options),
  goodReading('protective-conductor-current', options),
  runEnded(true, 'pass'),
];

export function facts(
  events: readonly UnitEvent[],
  over: {
    protectionClass?: 'I' | 'II' | 'III';
    licensedOnly?: boolean;
    sheet?: Sheet | undefined;
    demo?: boolean;
    fourEyes?: boolean;
  } = {},
): UnitFacts {
  return {
    unit: { number: 412, protectionClass: over.protectionClass ?? 'I', licensedOnly: over.licensedOnly ?? false },
    sheet: 'sheet' in over ? over.sheet : heron,
    events,
    shop: { demo: over.demo ?? false, fourEyes: over.fourEyes ?? true },
  };
}
