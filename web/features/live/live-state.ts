import type { LiveEvent, LiveLamp, LiveMessage, LiveMessageOf, LiveWorkEvent } from '../../../shared/api/live.js';
import type { PersonRef } from '../../../shared/history/events.js';
import type { Verdict } from '../../../shared/verdict.js';

/** Of a capture's lanes so much is kept to be drawn. */
const LANES_KEPT_MS = 60_000;
/** More flashes than this in a second are not shown as flashes (WCAG 2.3.1, three flashes). */
const FLASHES_A_SECOND_AT_MOST = 3;
/** Without a threshold from the decoder: half of full scale. */
const HALF_PERCENT = 50;

export interface LiveResult {
  verdict: Verdict | undefined;
  told: string;
  at: string;
}

export interface LiveCapture {
  began: LiveMessageOf<'capture began'>;
  /** `[ms, level, …]` in percent, the last minute. */
  rows: readonly (readonly number[])[];
  marksMs: readonly number[];
  code: LiveMessageOf<'code so far'> | undefined;
  ended: LiveMessageOf<'capture ended'> | undefined;
}

/** The work of a bench as it stands. */
export interface LiveWork {
  id: string;
  unit: number;
  by: PersonRef;
  bench: string;
  began: LiveMessageOf<'began'>;
  /** The step that goes on. */
  step: { index: number; at: string } | undefined;
  results: ReadonlyMap<number, LiveResult>;
  /** The step whose result came last. */
  lastResult: number | undefined;
  capture: LiveCapture | undefined;
  ended: LiveMessageOf<'ended'> | undefined;
  /** By the server's clock, and by this page's. */
  heardAt: string;
  heardAtMs: number;
}

export type LiveWorks = ReadonlyMap<string, LiveWork>;

/** What a page knows after one more event. */
export function afterEvent(works: LiveWorks, event: LiveEvent, nowMs: number): LiveWorks {
  if (event.kind === 'start') return new Map();
  if (event.kind !== 'work') return works;
  const before = works.get(event.work);
  let work: LiveWork | undefined = before && { ...before, by: event.by, heardAt: event.at, heardAtMs: nowMs };
  for (const message of event.messages) work = afterMessage(work, message, event, nowMs);
  return work === undefined ? works : new Map(works).set(work.id, work);
}

function afterMessage(work: LiveWork | undefined, message: LiveMessage, event: LiveWorkEvent, nowMs: number): LiveWork | undefined {
  if (message.kind === 'began') {
    return {
      id: event.work,
      unit: event.unit,
      by: event.by,
      bench: event.bench ?? `${message.rig.name}, ${event.by.name}`,
      began: message,
      step: undefined,
      results: new Map(),
      lastResult: undefined,
      capture: undefined,
      ended: undefined,
      heardAt: event.at,
      heardAtMs: nowMs,
    };
  }
  // Its beginning is no longer kept: it is told again when the work goes on.
  if (!work) return undefined;
  switch (message.kind) {
    case 'step began':
      return { ...work, step: { index: message.index, at: message.at }, capture: undefined };
    case 'step ended': {
      const result = { verdict: message.verdict, told: message.told, at: message.at };
      const step = work.step?.index === message.index ? undefined : work.step;
      return { ...work, step, results: new Map(work.results).set(message.index, result), lastResult: message.index };
    }
    case 'capture began':
      return { ...work, capture: { began: message, rows: [], marksMs: [], code: undefined, ended: undefined } };
    case 'ended':
      return { ...work, step: undefined, ended: message };
    case 'still here':
      return work;
    default:
      return work.capture ? { ...work, capture: afterLamps(work.capture, message) } : work;
  }
}

function afterLamps(capture: LiveCapture, message: LiveMessageOf<'lamps' | 'mark' | 'code so far' | 'capture ended'>): LiveCapture {
  switch (message.kind) {
    case 'lamps': {
      const width = capture.began.lamps.length + 1;
      const rows = [...capture.rows, ...message.rows.filter((row) => row.length === width)];
      const from = (rows.at(-1)?.[0] ?? 0) - LANES_KEPT_MS;
      const first = rows.findIndex(([ms = 0]) => ms >= from);
      return { ...capture, rows: first > 0 ? rows.slice(first) : rows };
    }
    case 'mark':
      return { ...capture, marksMs: [...capture.marksMs, message.atMs] };
    case 'code so far':
      return { ...capture, code: message };
    case 'capture ended':
      return { ...capture, ended: message };
  }
}

/** Above which percentage a lamp counts as lit. */
export const thresholdOf = ({ code }: Pick<LiveCapture, 'code'>, lamp: number): number => code?.thresholds[lamp] ?? HALF_PERCENT;

export interface LampNow {
  lamp: LiveLamp;
  lit: boolean;
  /** It flashes faster than may be shown: drawn lit, with the word. */
  fast: boolean;
}

/** What each lamp does now: what the probe saw last. */
export function lampsNow(capture: LiveCapture): LampNow[] {
  const last = capture.rows.at(-1);
  const from = (last?.[0] ?? 0) - 1000;
  const lastSecond = capture.rows.slice(
    Math.max(
      0,
      capture.rows.findLastIndex(([ms = 0]) => ms < from),
    ),
  );
  return capture.began.lamps.map((lamp, index) => {
    const threshold = thresholdOf(capture, index);
    const lit = lastSecond.map((row) => (row[index + 1] ?? 0) > threshold);
    const flashes = lit.filter((now, at) => at > 0 && now && lit[at - 1] === false).length;
    return { lamp, lit: lit.at(-1) === true, fast: flashes > FLASHES_A_SECOND_AT_MOST };
  });
}

/** Where each bench stands: its newest work, benches by name. */
export function benchesOf(works: LiveWorks): LiveWork[] {
  const newest = new Map<string, LiveWork>();
  for (const work of works.values()) {
    const other = newest.get(work.bench);
    if (!other || Date.parse(other.heardAt) <= Date.parse(work.heardAt)) newest.set(work.bench, work);
  }
  return [...newest.values()].sort((a, b) => a.bench.localeCompare(b.bench, 'en', { numeric: true }));
}

/** A bench that was not heard of for so long (four of its signs of life) may have lost its network. */
const SILENT_AFTER_MS = 60_000;
export const isSilent = ({ ended, heardAtMs }: Pick<LiveWork, 'ended' | 'heardAtMs'>, nowMs: number): boolean =>
  !ended && nowMs - heardAtMs > SILENT_AFTER_MS;
