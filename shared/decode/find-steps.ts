import type { Bins } from './bin-levels.js';

/** What the steps of one lane say about each bin: lit, dark, or not told. */
export type StepLabel = -1 | 0 | 1;
export const NOT_TOLD: StepLabel = -1;

export interface Steps {
  /** One a bin. */
  labels: Int8Array;
  /** Standard deviation of a bin's level, counts. */
  noise: number;
  /** The usual step, counts; undefined when the lamp never stepped. */
  stepSize: number | undefined;
  /** What a step must measure to be seen every time, counts. */
  clearStep: number;
}

/** Windows on either side of a step: short ones see the ready blink, long ones see through more noise. */
const WINDOWS_S = [0.16, 0.4, 0.8] as const;
/** A step must stand out by this many standard deviations: by chance alone less than one in 10^8 positions. */
const STEP_SIGMAS = 6;
/** A lamp whose usual step stands out by this many is seen at every step: one in 30 000 falls below the threshold. */
const CLEAR_SIGMAS = 10;
/** A change smaller than this share of full scale is no lamp: glow of a neighbour, flicker, a cloud. */
const LEAST_STEP = 0.05;
/** How much of a step the shortest window must see, less what noise may take from it. */
const SHARP_SHARE = 0.7;
const SHARP_SIGMAS = 3;
/** Between small steps a level this far (as a share of the typical step) from the usual one of its kind is not told. */
const DOUBT_SHARE = 0.3;
/** A mean absolute deviation of normal noise, as a share of its standard deviation, for the median: 0.6745. */
const MEDIAN_TO_SIGMA = 0.6745;
const LEAST_NOISE = 0.002;

/**
 * Finds where one lamp's light steps up or down: the difference of the means before and after, the matched filter for a step in white noise
 * (standards, topic 9). Slow drift makes no step, so this needs no thresholds to start from. Between an up and a down the lamp is lit,
 * between a down and an up it is dark; what contradicts itself is not told.
 */
export function findSteps(bins: Bins, lane: Float64Array, fullScale: number): Steps {
  const used: number[] = [];
  for (let bin = 0; bin < lane.length; bin += 1) if ((bins.weights[bin] as number) > 0) used.push(bin);
  const labels = new Int8Array(lane.length).fill(NOT_TOLD);
  const noise = Math.max(noiseOf(lane, used), LEAST_NOISE * fullScale);
  const sums = new Float64Array(used.length + 1);
  used.forEach((bin, index) => (sums[index + 1] = (sums[index] as number) + (lane[bin] as number)));
  const widthS = usualWidthS(bins, used);
  const shortest = Math.max(2, Math.round(WINDOWS_S[0] / widthS));
  const sharp = { differences: stepDifferences(sums, shortest), noise: stepNoise(noise, shortest) };
  let seen: { window: number; typical: number; least: number; differences: Float64Array } | undefined;
  for (const windowS of WINDOWS_S) {
    const window = Math.max(2, Math.round(windowS / widthS));
    const differences = window === shortest ? sharp.differences : stepDifferences(sums, window);
    const least = Math.max(STEP_SIGMAS * stepNoise(noise, window), LEAST_STEP * fullScale);
    const sizes = peaksAbove(differences, least)
      .filter((peak) => isSharp(peak, window, sharp))
      .map((peak) => Math.abs(peak.size))
      .sort((a, b) => b - a);
    // The second largest: one spike doesn't set the scale; half of it keeps a neighbour's glow out.
    const typical = sizes[1] ?? sizes[0];
    if (typical === undefined) continue;
    seen = { window, typical, least, differences };
    if (typical >= CLEAR_SIGMAS * stepNoise(noise, window)) break;
  }
  const longest = Math.max(2, Math.round((WINDOWS_S.at(-1) ?? 1) / widthS));
  const clearStep = CLEAR_SIGMAS * stepNoise(noise, longest);
  if (seen === undefined) return { labels, noise, stepSize: undefined, clearStep };
  const { window, typical, least, differences } = seen;
  const peaks = peaksAbove(differences, Math.max(least, typical / 2)).filter((peak) => isSharp(peak, window, sharp));
  labelBetween(peaks, used, labels);
  const small = peaksAbove(differences, least).filter((peak) => Math.abs(peak.size) <= typical / 2);
  doubtBetween(small, used, lane, labels, DOUBT_SHARE * typical);
  return { labels, noise, stepSize: typical, clearStep: CLEAR_SIGMAS * stepNoise(noise, window) };
}

/** A lamp steps within tens of milliseconds: the shortest window must see most of what a longer one sees. Ambient light swells. */
function isSharp(peak: Peak, window: number, sharp: { differences: Float64Array; noise: number }): boolean {
  let most = 0;
  for (let border = peak.border - (window >> 1); border <= peak.border + (window >> 1); border += 1) {
    most = Math.max(most, Math.sign(peak.size) * (sharp.differences[border] ?? 0));
  }
  return most >= SHARP_SHARE * Math.abs(peak.size) - SHARP_SIGMAS * sharp.noise;
}

/** The standard deviation of the difference of two means of `window` bins. */
function stepNoise(noise: number, window: number): number {
  return noise * Math.sqrt(2 / window);
}

/** From the differences of neighbouring bins, so that steps and drift hardly count; the median, so that outliers don't either. */
function noiseOf(lane: Float64Array, used: readonly number[]): number {
  if (used.length < 3) return 0;
  const differences = new Float64Array(used.length - 1);
  for (let index = 1; index < used.length; index += 1) {
    differences[index - 1] = Math.abs((lane[used[index] as number] as number) - (lane[used[index - 1] as number] as number));
  }
  differences.sort();
  return (differences[differences.length >> 1] as number) / MEDIAN_TO_SIGMA / Math.SQRT2;
}

function usualWidthS(bins: Bins, used: readonly number[]): number {
  const last = used.at(-1);
  const first = used[0];
  if (first === undefined || last === undefined) return 1;
  let totalS = 0;
  for (const bin of used) totalS += (bins.endsS[bin] as number) - (bins.startsS[bin] as number);
  return Math.max(totalS / used.length, 1e-3);
}

/** Mean of the `window` bins after each border, minus the mean of those before; shorter windows at both ends. */
function stepDifferences(sums: Float64Array, window: number): Float64Array {
  const count = sums.length - 1;
  const differences = new Float64Array(Math.max(0, count));
  const least = Math.max(1, window >> 1);
  for (let border = 1; border < count; border += 1) {
    const before = Math.min(window, border);
    const after = Math.min(window, count - border);
    if (before < least || after < least) continue;
    const left = ((sums[border] as number) - (sums[border - before] as number)) / before;
    const right = ((sums[border + after] as number) - (sums[border] as number)) / after;
    differences[border] = right - left;
  }
  return differences;
}

interface Peak {
  border: number;
  size: number;
}

function peaksAbove(differences: Float64Array, least: number): Peak[] {
  const peaks: Peak[] = [];
  let best: Peak | undefined;
  for (let border = 0; border < differences.length; border += 1) {
    const size = differences[border] as number;
    const counts = Math.abs(size) > least;
    if (best !== undefined && (!counts || size > 0 !== best.size > 0)) {
      peaks.push(best);
      best = undefined;
    }
    if (counts && (best === undefined || Math.abs(size) > Math.abs(best.size))) best = { border, size };
  }
  if (best !== undefined) peaks.push(best);
  return peaks;
}

function labelBetween(peaks: readonly Peak[], used: readonly number[], labels: Int8Array): void {
  for (let index = 0; index <= peaks.length; index += 1) {
    const opening = peaks[index - 1];
    const closing = peaks[index];
    const saysLit = (opening === undefined || opening.size > 0) && (closing === undefined || closing.size < 0);
    const saysDark = (opening === undefined || opening.size < 0) && (closing === undefined || closing.size > 0);
    if (saysLit === saysDark) continue;
    for (let position = opening?.border ?? 0; position < (closing?.border ?? used.length); position += 1) {
      labels[used[position] as number] = saysLit ? 1 : 0;
    }
  }
}

/**
 * A lamp that is lit or goes dark beside a bright neighbour may step by less than half its usual size. Where small steps stand within a run,
 * each piece keeps its label only if its level is near the usual one of that label.
 */
function doubtBetween(small: readonly Peak[], used: readonly number[], lane: Float64Array, labels: Int8Array, tolerance: number): void {
  if (small.length === 0) return;
  const usual = [0, 1].map((label) => medianOf(used.filter((bin) => labels[bin] === label).map((bin) => lane[bin] as number)));
  const starts = [0, ...small.map((peak) => peak.border)];
  const runEnds = (position: number): boolean => position > 0 && labels[used[position] as number] !== labels[used[position - 1] as number];
  const doubtful = new Set(starts);
  let from = 0;
  for (let position = 1; position <= used.length; position += 1) {
    const cut = position === used.length || runEnds(position) || doubtful.has(position);
    if (!cut) continue;
    const label = labels[used[from] as number] as number;
    let sum = 0;
    for (let at = from; at < position; at += 1) sum += lane[used[at] as number] as number;
    const beside = (from > 0 && doubtful.has(from)) || doubtful.has(position);
    if (label >= 0 && beside && Math.abs(sum / (position - from) - (usual[label] as number)) > tolerance) {
      for (let at = from; at < position; at += 1) labels[used[at] as number] = NOT_TOLD;
    }
    from = position;
  }
}

function medianOf(values: readonly number[]): number {
  const sorted = Float64Array.from(values).sort();
  return sorted[sorted.length >> 1] ?? 0;
}
