import type { Bins } from './bin-levels.js';
import { solveSymmetric } from './solve-symmetric.js';

/** A lamp's two levels over time: `dark` and `dark + amplitude`, counts, one value a bin; `glow` is what its neighbours add. */
export interface LevelFit {
  dark: Float64Array;
  amplitude: Float64Array;
  glow: Float64Array;
  /** What each neighbour adds, as a share of that neighbour's own amplitude. */
  glowShares: number[];
  /** Standard deviation of a bin's level around the fit, counts. */
  noise: number;
}

/** What a fit is measured against, counts: full scale, the noise of a bin, and about what the lamp adds when lit. */
export interface LevelScale {
  fullScale: number;
  noise: number;
  amplitude: number;
}

/** Light that a neighbouring lamp throws: its amplitude while it is lit, else 0; counts, one value a bin. */
export type Glow = Float64Array;

/** Ambient light and gain may wander this slowly: one knot of the curve each so many seconds. */
const KNOT_S = 10;
const MOST_KNOTS = 24;
/** How far a level may wander from knot to knot, one standard deviation: the dark level as a share of full scale, the amplitude of itself. */
const DARK_WANDER = 0.03;
const AMPLITUDE_WANDER = 0.05;
const LEAST_AMPLITUDE = 0.02;
const AMPLITUDE_FACTOR = 1.7;
/** How much a neighbour's glow adds, as a share of its amplitude, beforehand: one standard deviation; and at most. */
const GLOW_SPREAD = 0.05;
const MOST_GLOW = 0.25;
const NO_GLOW_SPREAD = 1e-6;
/** Beyond so many standard deviations a bin counts less and less (Cauchy's weight). */
const OUTLIER_SIGMAS = 3;
const ROUNDS = 2;

/**
 * Fits the two levels of one lamp to its bins by least squares, given which bins are lit and which dark: dark level and amplitude are
 * straight between knots 10 s apart, held together by a stated wander, so that a lamp that is not lit for a while keeps its amplitude.
 *
 * @param states 1 lit, 0 dark, -1 left out (near an edge, or not known)
 * @param scale what the curves are measured against; an amplitude of 0 fits the dark level and the glow alone
 */
export function fitLevels(bins: Bins, lane: Float64Array, states: Int8Array, glows: readonly Glow[], scale: LevelScale): LevelFit {
  const axis = knotAxis(bins);
  let solution: Float64Array | undefined;
  let sigma = scale.noise;
  for (let round = 0; round < ROUNDS; round += 1) {
    const equations = priorEquations(axis.knots, glows.length, scale, solution);
    const spread = addBins(equations, axis, bins, lane, states, glows, sigma, scale.amplitude > 0, solution);
    solution = solveSymmetric(equations.matrix, equations.right);
    if (spread !== undefined) sigma = Math.max(spread, scale.noise / 2);
  }
  return curvesOf(solution ?? new Float64Array(2 * axis.knots + glows.length), axis, glows, sigma);
}

/** Where each bin's middle stands among the knots: `knot[bin]` and the share of the way to the next. */
interface KnotAxis {
  knots: number;
  knot: Int32Array;
  share: Float64Array;
}

function knotAxis(bins: Bins): KnotAxis {
  const count = bins.startsS.length;
  const startS = bins.startsS[0] ?? 0;
  const spanS = Math.max((bins.endsS[count - 1] ?? 0) - startS, 1e-3);
  const knots = Math.min(MOST_KNOTS, Math.max(2, Math.ceil(spanS / KNOT_S) + 1));
  const knot = new Int32Array(count);
  const share = new Float64Array(count);
  for (let bin = 0; bin < count; bin += 1) {
    const middleS = ((bins.startsS[bin] as number) + (bins.endsS[bin] as number)) / 2;
    const at = Math.max(0, Math.min(knots - 1, ((middleS - startS) / spanS) * (knots - 1)));
    knot[bin] = Math.min(knots - 2, Math.floor(at));
    share[bin] = at - (knot[bin] as number);
  }
  return { knots, knot, share };
}

/** Normal equations; unknowns: dark level at each knot, amplitude at each knot, then one share a glow. */
interface Equations {
  matrix: Float64Array;
  right: Float64Array;
}

function priorEquations(knots: number, glowCount: number, scale: LevelScale, before: Float64Array | undefined): Equations {
  const size = 2 * knots + glowCount;
  const matrix = new Float64Array(size * size);
  const add = (row: number, column: number, value: number): void => {
    matrix[row * size + column] = (matrix[row * size + column] as number) + value;
  };
  wander(add, 0, knots, DARK_WANDER * scale.fullScale, scale.fullScale);
  wander(add, knots, knots, AMPLITUDE_WANDER * Math.max(scale.amplitude, LEAST_AMPLITUDE * scale.fullScale), scale.fullScale);
  for (let row = 2 * knots; row < size; row += 1) {
    // A neighbour takes no light away: a share that came out negative is held at zero.
    const negative = before !== undefined && (before[row] as number) <= 0;
    add(row, row, 1 / (negative ? NO_GLOW_SPREAD : GLOW_SPREAD) ** 2);
  }
  return { matrix, right: new Float64Array(size) };
}

/** Adds every told bin; with a solution from before, outliers count less, and the spread around it is returned. */
function addBins(
  equations: Equations,
  axis: KnotAxis,
  bins: Bins,
  lane: Float64Array,
  states: Int8Array,
  glows: readonly Glow[],
  sigma: number,
  lampCanBeLit: boolean,
  before: Float64Array | undefined,
): number | undefined {
  const { matrix, right } = equations;
  const size = right.length;
  const factors = new Float64Array(4 + glows.length);
  const rows = new Int32Array(4 + glows.length);
  let squares = 0;
  let total = 0;
  for (let bin = 0; bin < lane.length; bin += 1) {
    const state = states[bin] as number;
    if (state < 0 || bins.weights[bin] === 0) continue;
    const knot = axis.knot[bin] as number;
    const share = axis.share[bin] as number;
    let used = 2;
    rows[0] = knot;
    factors[0] = 1 - share;
    rows[1] = knot + 1;
    factors[1] = share;
    if (state === 1 && lampCanBeLit) {
      rows[2] = axis.knots + knot;
      factors[2] = 1 - share;
      rows[3] = axis.knots + knot + 1;
      factors[3] = share;
      used = 4;
    }
    for (let index = 0; index < glows.length; index += 1) {
      const light = (glows[index] as Glow)[bin] as number;
      if (light === 0) continue;
      rows[used] = 2 * axis.knots + index;
      factors[used] = light;
      used += 1;
    }
    const level = lane[bin] as number;
    let weight = 1 / (sigma * sigma);
    if (before !== undefined) {
      let residual = level;
      for (let k = 0; k < used; k += 1) residual -= (factors[k] as number) * (before[rows[k] as number] as number);
      const relative = residual / (OUTLIER_SIGMAS * sigma);
      const robust = 1 / (1 + relative * relative);
      weight *= robust;
      squares += robust * residual * residual;
      total += robust;
    }
    for (let k = 0; k < used; k += 1) {
      const row = rows[k] as number;
      const weighted = weight * (factors[k] as number);
      right[row] = (right[row] as number) + weighted * level;
      for (let m = 0; m <= k; m += 1) {
        const cell = row * size + (rows[m] as number);
        matrix[cell] = (matrix[cell] as number) + weighted * (factors[m] as number);
      }
    }
  }
  return total > 0 ? Math.sqrt(squares / total) : undefined;
}

function curvesOf(solution: Float64Array, axis: KnotAxis, glows: readonly Glow[], noise: number): LevelFit {
  const { knots } = axis;
  const count = axis.knot.length;
  keepNear(solution.subarray(knots, 2 * knots));
  const glowShares = glows.map((_, index) => Math.min(MOST_GLOW, Math.max(0, solution[2 * knots + index] as number)));
  const dark = new Float64Array(count);
  const amplitude = new Float64Array(count);
  const glow = new Float64Array(count);
  for (let bin = 0; bin < count; bin += 1) {
    const knot = axis.knot[bin] as number;
    const share = axis.share[bin] as number;
    dark[bin] = (1 - share) * (solution[knot] as number) + share * (solution[knot + 1] as number);
    amplitude[bin] = (1 - share) * (solution[knots + knot] as number) + share * (solution[knots + knot + 1] as number);
    for (let index = 0; index < glows.length; index += 1) {
      glow[bin] = (glow[bin] as number) + (glowShares[index] as number) * ((glows[index] as Glow)[bin] as number);
    }
  }
  return { dark, amplitude, glow, glowShares, noise };
}

/** Gain wanders, but not without bounds: the amplitude at each knot stays within a factor of the median. */
function keepNear(amplitudes: Float64Array): void {
  const sorted = Float64Array.from(amplitudes).sort();
  const median = Math.max(0, sorted[sorted.length >> 1] ?? 0);
  amplitudes.forEach((amplitude, knot) => {
    amplitudes[knot] = Math.min(median * AMPLITUDE_FACTOR, Math.max(median / AMPLITUDE_FACTOR, amplitude));
  });
}

/** A weak pull of each knot towards the one before, and of the first towards zero, so that nothing is undetermined. */
function wander(
  add: (row: number, column: number, value: number) => void,
  from: number,
  knots: number,
  step: number,
  fullScale: number,
): void {
  const pull = 1 / step ** 2;
  add(from, from, 1e-4 / fullScale ** 2);
  for (let knot = 1; knot < knots; knot += 1) {
    const here = from + knot;
    add(here, here, pull);
    add(here - 1, here - 1, pull);
    add(here, here - 1, -pull);
  }
}
