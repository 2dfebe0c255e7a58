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
  const { fullScale, noise } = scale;
  const lampCanBeLit = scale.amplitude > 0;
  const count = lane.length;
  const startS = bins.startsS[0] ?? 0;
  const spanS = Math.max((bins.endsS[count - 1] ?? 0) - startS, 1e-3);
  const knots = Math.min(MOST_KNOTS, Math.max(2, Math.ceil(spanS / KNOT_S) + 1));
  const size = 2 * knots + glows.length;
  const position = (bin: number): number =>
    Math.min(knots - 1 - 1e-9, ((((bins.startsS[bin] as number) + (bins.endsS[bin] as number)) / 2 - startS) / spanS) * (knots - 1));

  let solution = new Float64Array(size);
  let sigma = noise;
  for (let round = 0; round < ROUNDS; round += 1) {
    const matrix = new Float64Array(size * size);
    const right = new Float64Array(size);
    const add = (row: number, column: number, value: number): void => {
      matrix[row * size + column] = (matrix[row * size + column] as number) + value;
    };
    wander(add, 0, knots, DARK_WANDER * fullScale, fullScale);
    wander(add, knots, knots, AMPLITUDE_WANDER * Math.max(scale.amplitude, LEAST_AMPLITUDE * fullScale), fullScale);
    // A neighbour takes no light away: a share that came out negative is held at zero.
    glows.forEach((_, index) => {
      const row = 2 * knots + index;
      add(row, row, 1 / (round > 0 && (solution[row] as number) <= 0 ? NO_GLOW_SPREAD : GLOW_SPREAD) ** 2);
    });
    const indexes = new Int32Array(4 + glows.length);
    const factors = new Float64Array(4 + glows.length);
    let squares = 0;
    let total = 0;
    for (let bin = 0; bin < count; bin += 1) {
      const state = states[bin] as number;
      if (state < 0 || (bins.weights[bin] as number) === 0) continue;
      const at = position(bin);
      const knot = Math.floor(at);
      const share = at - knot;
      const lit = state === 1 && lampCanBeLit ? 1 : 0;
      indexes[0] = knot;
      factors[0] = 1 - share;
      indexes[1] = knot + 1;
      factors[1] = share;
      indexes[2] = knots + knot;
      factors[2] = lit * (1 - share);
      indexes[3] = knots + knot + 1;
      factors[3] = lit * share;
      glows.forEach((glow, index) => {
        indexes[4 + index] = 2 * knots + index;
        factors[4 + index] = glow[bin] as number;
      });
      let weight = 1 / sigma ** 2;
      if (round > 0) {
        let fitted = 0;
        for (let k = 0; k < indexes.length; k += 1) fitted += (factors[k] as number) * (solution[indexes[k] as number] as number);
        const residual = (lane[bin] as number) - fitted;
        const robust = 1 / (1 + (residual / (OUTLIER_SIGMAS * sigma)) ** 2);
        weight *= robust;
        squares += robust * residual ** 2;
        total += robust;
      }
      for (let k = 0; k < indexes.length; k += 1) {
        const factor = factors[k] as number;
        if (factor === 0) continue;
        const row = indexes[k] as number;
        right[row] = (right[row] as number) + weight * factor * (lane[bin] as number);
        for (let m = 0; m <= k; m += 1) {
          const other = factors[m] as number;
          if (other !== 0) add(row, indexes[m] as number, weight * factor * other);
        }
      }
    }
    solution = new Float64Array(solveSymmetric(matrix, right));
    if (total > 0) sigma = Math.max(Math.sqrt(squares / total), noise / 2);
  }

  const dark = new Float64Array(count);
  const amplitude = new Float64Array(count);
  const glow = new Float64Array(count);
  const glowShares = glows.map((_, index) => Math.min(MOST_GLOW, Math.max(0, solution[2 * knots + index] as number)));
  for (let bin = 0; bin < count; bin += 1) {
    const at = Math.max(0, position(bin));
    const knot = Math.floor(at);
    const share = at - knot;
    dark[bin] = (1 - share) * (solution[knot] as number) + share * (solution[knot + 1] as number);
    amplitude[bin] = (1 - share) * (solution[knots + knot] as number) + share * (solution[knots + knot + 1] as number);
    glows.forEach((lane_, index) => (glow[bin] = (glow[bin] as number) + (glowShares[index] as number) * (lane_[bin] as number)));
  }
  keepNear(amplitude);
  return { dark, amplitude, glow, glowShares, noise: sigma };
}

/** Gain wanders, but not without bounds: an amplitude stays within a factor of its median. */
function keepNear(amplitude: Float64Array): void {
  const sorted = Float64Array.from(amplitude).sort();
  const median = Math.max(0, sorted[sorted.length >> 1] ?? 0);
  for (let bin = 0; bin < amplitude.length; bin += 1) {
    amplitude[bin] = Math.min(median * AMPLITUDE_FACTOR, Math.max(median / AMPLITUDE_FACTOR, amplitude[bin] as number));
  }
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
