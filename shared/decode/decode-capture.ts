import type { Capture } from '../lamps/capture.js';
import type { Sheet } from '../sheet/schema.js';
import type { DecodeAnswer, Segment } from './answer.js';
import { captureDurationS } from './bin-levels.js';
import { codingReader } from './codings.js';
import { seeLamps } from './see-lamps.js';
import { warningsFor } from './warnings.js';

/** A code is stated from this confidence on unless told otherwise (contract, section 3). */
export const DEFAULT_MIN_CONFIDENCE = 0.999;

export interface DecodeOptions {
  /** 0 to 1; 0.999 unless given. */
  minConfidence?: number;
}

/**
 * Decodes a lamp capture with a service sheet: says which codes were shown, how often and how surely, or why it can't (contract, section 3).
 *
 * Pure and deterministic: the same capture and sheet give the same answer on the bench, on the server and in the browser. Time grows
 * linearly with the capture, so a growing one may be decoded again and again. The model and its assumptions are in decoder.md beside this.
 * Refuses a sheet whose coding it can't read yet with a NotYetError; a capture without samples gives no segments.
 *
 * @example decodeCapture(readCapture(text), sheet).codes // [{ code: 'G5K3', repeats: 8, confidence: 0.9999 }]
 */
export function decodeCapture(capture: Capture, sheet: Sheet, options: DecodeOptions = {}): DecodeAnswer {
  const reader = codingReader(sheet.coding.kind);
  const minConfidence = options.minConfidence ?? DEFAULT_MIN_CONFIDENCE;
  const durationS = captureDurationS(capture);
  const base = {
    samples: capture.timesUs.length,
    durationS,
    lost: capture.gaps.reduce((sum, gap) => sum + gap.lost, 0),
    cut: capture.cut,
  };
  const missing = reader.neededLamps(sheet).filter((id) => !capture.header.lamps.includes(id));
  if (base.samples === 0) return { ...base, deadLamps: [], segments: [], codes: [], warnings: warningsFor(capture, sheet, []) };
  if (missing.length > 0) {
    const names = missing.map((id) => `'${id}'`).join(', ');
    const reason = `lamp ${names} of the coding is not in the file: name its column in the header, or point a sensor at it`;
    const segments: Segment[] = [{ kind: 'unreadable', fromS: 0, toS: lastLightS(capture, sheet, durationS), reason, candidates: [] }];
    return { ...base, deadLamps: [], segments, codes: [], warnings: warningsFor(capture, sheet, []) };
  }
  const { bins, lights } = seeLamps(capture, sheet);
  const reading = reader.read({
    sheet,
    bins,
    lights: new Map(lights.map((light) => [light.id, light])),
    nextMarksS: nextMarksOf(capture),
    minConfidence,
  });
  const segments = inOrder(reading.segments);
  return {
    ...base,
    deadLamps: reading.deadLamps,
    segments,
    codes: segments.flatMap((segment) =>
      segment.kind === 'code'
        ? [{ code: segment.code, ...(segment.repeats === undefined ? {} : { repeats: segment.repeats }), confidence: segment.confidence }]
        : [],
    ),
    warnings: [...warningsFor(capture, sheet, lights), ...reading.warnings],
  };
}

/** Whether every stretch of an answer was read: what exit code 0 of `refettle decode` asks. */
export function isReadable(answer: DecodeAnswer): boolean {
  return answer.samples > 0 && answer.segments.every((segment) => segment.kind !== 'unreadable');
}

/** The whole file; the darkness at its end is left off when it is shorter than one phase, as between any two stretches. */
function lastLightS(capture: Capture, sheet: Sheet, durationS: number): number {
  const { bins, lights } = seeLamps(capture, sheet);
  const lastLit = Math.max(...lights.map((light) => light.states.lastIndexOf(1)), -1);
  const litUntilS = lastLit < 0 ? 0 : (bins.endsS[lastLit] ?? 0);
  const shortestPhaseS = sheet.coding.kind === 'weighted-phases' ? sheet.coding.phaseS[0] : 0;
  return toMilliseconds(durationS - litUntilS < shortestPhaseS ? litUntilS : durationS);
}

/** When the technician brought up the next code, seconds, in order. */
export function nextMarksOf(capture: Capture): number[] {
  return capture.marks
    .filter((mark) => mark.label === 'next')
    .map((mark) => mark.atUs / 1e6)
    .sort((a, b) => a - b);
}

function inOrder(segments: readonly Segment[]): Segment[] {
  const sorted = [...segments].sort((a, b) => a.fromS - b.fromS || a.toS - b.toS);
  let reachedS = 0;
  return sorted.flatMap((segment) => {
    const fromS = Math.max(reachedS, toMilliseconds(segment.fromS));
    const toS = toMilliseconds(segment.toS);
    if (toS <= fromS) return [];
    reachedS = toS;
    return [{ ...segment, fromS, toS }];
  });
}

function toMilliseconds(timeS: number): number {
  return Math.round(timeS * 1000) / 1000;
}
