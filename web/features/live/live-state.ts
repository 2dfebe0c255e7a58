import type { LiveEvent, LiveLamp, LiveMessage, LiveMessageOf, LiveWorkEvent } from '../../../shared/api/live.js';
import type { PersonRef } from '../../../shared/history/events.js';
import type { Verdict } from '../../../shared/verdict.js';

/** Of a capture's lanes so much is kept to be drawn. */
const LANES_KEPT_MS = 60_000;
/** Rows of twenty a second for that time, twice over; and more marks than a technician makes in it. */
const ROWS_AT_MOST = 2_400;
const MARKS_AT_MOST = 100;
/** As the server shows it to who comes: ended work for ten minutes, and a bench that is not heard of for fifteen. */
const ENDED_SHOWN_MS = 10 * 60_000;
const UNHEARD_SHOWN_MS = 15 * 60_000;
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
  /** What it is called: the shared bench, or the rig and who works there. */
  bench: string;
  atSharedBench: boolean;
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
      atSharedBench: event.bench !== undefined,
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
      // Its lanes are on the unit's books now.
      return { ...work, step: undefined, capture: undefined, ended: message };
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
      const first = Math.max(
        rows.length - ROWS_AT_MOST,
        rows.findIndex(([ms = 0]) => ms >= from),
      );
      const marksMs = capture.marksMs.some((ms) => ms < from) ? capture.marksMs.filter((ms) => ms >= from) : capture.marksMs;
      return { ...capture, rows: first > 0 ? rows.slice(first) : rows, marksMs };
    }
    case 'mark':
      return { ...capture, marksMs: [...capture.marksMs, message.atMs].slice(-MARKS_AT_MOST) };
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

/** Without what nobody looks for any more: a page may be open for weeks. The same where nothing is old. */
export function withoutOld(works: LiveWorks, nowMs: number): LiveWorks {
  const kept = [...works].filter(([, { ended, heardAtMs }]) => nowMs - heardAtMs <= (ended ? ENDED_SHOWN_MS : UNHEARD_SHOWN_MS));
  return kept.length === works.size ? works : new Map(kept);
}

/** A bench that was not heard of for so long (four of its signs of life) may have lost its network. */
const SILENT_AFTER_MS = 60_000;
export const isSilent = ({ ended, heardAtMs }: Pick<LiveWork, 'ended' | 'heardAtMs'>, nowMs: number): boolean =>
  !ended && nowMs - heardAtMs > SILENT_AFTER_MS;

/** Two people of one name are two, and so are a shared bench and a rig that has its name. */
const placeOf = ({ atSharedBench, bench, by, began }: LiveWork): string =>
  JSON.stringify(atSharedBench ? ['bench', bench] : ['rig', began.rig.name, by.id]);

/** Where each bench stands: its newest work, and what else still goes on there; benches by name. */
export function benchesOf(works: LiveWorks, nowMs: number): LiveWork[] {
  const newest = new Map<string, LiveWork>();
  for (const work of works.values()) {
    const other = newest.get(placeOf(work));
    if (!other || Date.parse(other.heardAt) <= Date.parse(work.heardAt)) newest.set(placeOf(work), work);
  }
  // Two terminals may have a rig of the same name: neither hides what goes on at the other.
  const alsoGoing = [...works.values()].filter((work) => newest.get(placeOf(work)) !== work && !work.ended && !isSilent(work, nowMs));
  return [...newest.values(), ...alsoGoing].sort(
    (a, b) => a.bench.localeCompare(b.bench, 'en', { numeric: true }) || a.id.localeCompare(b.id),
  );
}
