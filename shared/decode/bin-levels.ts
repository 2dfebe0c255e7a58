import type { Capture } from '../lamps/capture.js';

/** Light levels in short time bins that follow one another without overlap; a bin without samples is a hole. */
export interface Bins {
  startsS: Float64Array;
  endsS: Float64Array;
  /** How many samples fell into the bin; 0 in a hole. */
  weights: Float64Array;
  /** `levels[column][bin]`: the mean level in counts; in a hole the level before it. */
  levels: Float64Array[];
  /** True when the levels are typed (source `keys`): exact, held until the next sample. */
  exact: boolean;
  durationS: number;
}

/** 20 ms is one period of 50 Hz mains: averaging over it takes the flicker out before it can alias into the blink band. */
const BIN_S = 0.02;
/** A pause between samples is a hole when it is longer than this, and than three usual intervals. */
const LEAST_HOLE_S = 0.1;
const HOLE_INTERVALS = 3;
/** Enough intervals for a median. */
const MOST_INTERVALS = 4001;

/** The capture's length in seconds: its `end`, else the time of its last sample; 0 without either. */
export function captureDurationS(capture: Capture): number {
  return (capture.endUs ?? capture.timesUs.at(-1) ?? 0) / 1e6;
}

/**
 * Puts samples into time bins of about 20 ms, or of one usual interval where sampling is slower, so that uneven spacing, flicker and
 * different rates look alike afterwards. Levels typed by hand become one bin a sample, held until the next.
 *
 * @param columns which columns of the capture to take, in the order wanted
 */
export function binLevels(capture: Capture, columns: readonly number[]): Bins {
  return capture.header.source === 'keys' ? holdLevels(capture, columns) : averageLevels(capture, columns);
}

function holdLevels(capture: Capture, columns: readonly number[]): Bins {
  const durationS = captureDurationS(capture);
  const count = capture.timesUs.length;
  const bins = emptyBins(count, columns.length, true, durationS);
  for (let index = 0; index < count; index += 1) {
    const startS = (capture.timesUs[index] ?? 0) / 1e6;
    const nextS = index + 1 < count ? (capture.timesUs[index + 1] ?? 0) / 1e6 : Math.max(durationS, startS);
    bins.startsS[index] = startS;
    bins.endsS[index] = nextS;
    // As many samples as a probe would have sent, within reason: what counts is that a held level is sure.
    bins.weights[index] = Math.min(1000, Math.max(1, Math.round((nextS - startS) / BIN_S)));
    columns.forEach((column, lamp) => ((bins.levels[lamp] as Float64Array)[index] = capture.levels[column]?.[index] ?? 0));
  }
  return bins;
}

function averageLevels(capture: Capture, columns: readonly number[]): Bins {
  const times = capture.timesUs;
  const durationS = captureDurationS(capture);
  const intervalS = usualIntervalS(times);
  const widthUs = Math.max(BIN_S, intervalS) * 1e6;
  const holeUs = Math.max(LEAST_HOLE_S, HOLE_INTERVALS * intervalS) * 1e6;
  // Each sample opens at most a bin and a hole before it; one hole may stand at the end.
  const bins = emptyBins(2 * times.length + 1, columns.length, false, durationS);
  const { startsS, endsS, weights, levels } = bins;
  let bin = -1;
  let slot = Number.NaN;
  let beforeUs = 0;
  for (let index = 0; index < times.length; index += 1) {
    const timeUs = times[index] ?? 0;
    const fromUs = bin < 0 ? 0 : beforeUs + intervalS * 1e6;
    if (timeUs - (bin < 0 ? 0 : beforeUs) > holeUs) {
      if (bin >= 0) endsS[bin] = fromUs / 1e6;
      bin += 1;
      startsS[bin] = fromUs / 1e6;
      endsS[bin] = timeUs / 1e6;
      slot = Number.NaN;
    }
    const here = Math.floor(timeUs / widthUs);
    if (here !== slot) {
      if (bin >= 0) endsS[bin] = timeUs / 1e6;
      bin += 1;
      startsS[bin] = bin === 0 ? 0 : timeUs / 1e6;
      slot = here;
    }
    weights[bin] = (weights[bin] ?? 0) + 1;
    for (let lamp = 0; lamp < columns.length; lamp += 1) {
      const lane = levels[lamp] as Float64Array;
      lane[bin] = (lane[bin] as number) + (capture.levels[columns[lamp] as number]?.[index] ?? 0);
    }
    beforeUs = timeUs;
  }
  const lastUs = beforeUs + intervalS * 1e6;
  if (bin >= 0) endsS[bin] = Math.max(startsS[bin] as number, Math.min(lastUs / 1e6, Math.max(durationS, beforeUs / 1e6)));
  if (durationS * 1e6 - beforeUs > holeUs) {
    bin += 1;
    startsS[bin] = bin === 0 ? 0 : lastUs / 1e6;
    endsS[bin] = durationS;
  }
  const count = bin + 1;
  for (const lane of levels) {
    for (let index = 0; index < count; index += 1) {
      const weight = weights[index] as number;
      lane[index] = weight > 0 ? (lane[index] as number) / weight : index > 0 ? (lane[index - 1] as number) : 0;
    }
  }
  return {
    startsS: startsS.subarray(0, count),
    endsS: endsS.subarray(0, count),
    weights: weights.subarray(0, count),
    levels: levels.map((lane) => lane.subarray(0, count)),
    exact: false,
    durationS,
  };
}

function emptyBins(count: number, lamps: number, exact: boolean, durationS: number): Bins {
  return {
    startsS: new Float64Array(count),
    endsS: new Float64Array(count),
    weights: new Float64Array(count),
    levels: Array.from({ length: lamps }, () => new Float64Array(count)),
    exact,
    durationS,
  };
}

function usualIntervalS(timesUs: readonly number[]): number {
  const stride = Math.max(1, Math.floor((timesUs.length - 1) / MOST_INTERVALS));
  const intervals: number[] = [];
  for (let index = 1; index < timesUs.length; index += stride) {
    const interval = (timesUs[index] ?? 0) - (timesUs[index - 1] ?? 0);
    if (interval > 0) intervals.push(interval);
  }
  if (intervals.length === 0) return BIN_S;
  intervals.sort((a, b) => a - b);
  return (intervals[Math.floor(intervals.length / 2)] ?? BIN_S * 1e6) / 1e6;
}
