import type { Capture } from '../lamps/capture.js';
import type { Sheet } from '../sheet/schema.js';
import type { DecodeView } from './answer.js';
import type { Bins } from './bin-levels.js';
import { codingReader } from './codings.js';
import { DEFAULT_MIN_CONFIDENCE, nextMarksOf } from './decode-capture.js';
import type { LampLight } from './light-model.js';
import { litFraction, seeLamps } from './see-lamps.js';

/**
 * What a page draws beside the answer: for each lamp of the sheet that the capture has, its threshold and lit level (counts, averaged over
 * the capture), its lit stretches, and the phases the decoder counted. From the same stages that decode, so chart and answer agree.
 *
 * A lamp never seen lit has no lit level; one that never changed has no threshold. Lamps in panel order, times in seconds.
 *
 * @example viewCapture(capture, sheet).lamps[3] // { id: 'drain', threshold: 407, litLevel: 739, litFraction: 0.722, lit: [{ fromS: 0, toS: 0.45 }, …] }
 */
export function viewCapture(capture: Capture, sheet: Sheet): DecodeView {
  if (capture.timesUs.length === 0) return { lamps: [], phases: [] };
  const reader = codingReader(sheet.coding.kind);
  const { bins, lights } = seeLamps(capture, sheet);
  const fullScale = capture.header.scale.max;
  const lamps = lights.map((light) => {
    const share = litFraction(light, fullScale);
    return {
      id: light.id,
      threshold: light.changes ? rounded(thresholdOf(light)) : null,
      litLevel: share === undefined ? null : rounded(share * fullScale),
      litFraction: share === undefined ? null : Math.round(share * 1000) / 1000,
      lit: litStretches(bins, light),
    };
  });
  if (reader.neededLamps(sheet).some((id) => !capture.header.lamps.includes(id))) return { lamps, phases: [] };
  const reading = reader.read({
    sheet,
    bins,
    lights: new Map(lights.map((light) => [light.id, light])),
    nextMarksS: nextMarksOf(capture),
    minConfidence: DEFAULT_MIN_CONFIDENCE,
  });
  return { lamps, phases: reading.phases };
}

/** Halfway between dark and lit, averaged: where two levels in the same noise are told apart best. */
function thresholdOf(light: LampLight): number {
  let sum = 0;
  light.fit.dark.forEach((dark, bin) => (sum += dark + (light.fit.amplitude[bin] as number) / 2));
  return light.fit.dark.length === 0 ? 0 : sum / light.fit.dark.length;
}

function litStretches(bins: Bins, light: LampLight): { fromS: number; toS: number }[] {
  const stretches: { fromS: number; toS: number }[] = [];
  light.states.forEach((state, bin) => {
    if (state !== 1) return;
    const fromS = bins.startsS[bin] as number;
    const toS = bins.endsS[bin] as number;
    const last = stretches.at(-1);
    if (last !== undefined && light.states[bin - 1] === 1) last.toS = toS;
    else stretches.push({ fromS, toS });
  });
  return stretches;
}

function rounded(counts: number): number {
  return Math.round(counts * 10) / 10;
}
