import type { Bins } from './bin-levels.js';
import type { LevelFit } from './fit-levels.js';

/** One bin's evidence is held within this many nats: a single bin never decides alone. */
export const MOST_BIN_NATS = 6;
/** The model is not exact (warm-up, gain, glow): it is trusted to this share of the amplitude. */
const MODEL_SHARE = 0.1;
/** What a change of a lamp's state costs, nats: about one change in 3000 bins by chance; keeps flashes of less than 60 ms out. */
const CHANGE_NATS = 8;

/**
 * Log-likelihood ratio of lit against dark, nats, one value a bin: for two levels in white noise of the same spread,
 * a·(x − d − a/2)/σ² (standards, topic 9: with equal priors the threshold lies halfway and errs with probability Q(d′/2)).
 * Zero in a hole.
 */
export function litEvidence(bins: Bins, lane: Float64Array, fit: LevelFit): Float64Array {
  const evidence = new Float64Array(lane.length);
  for (let bin = 0; bin < lane.length; bin += 1) {
    if ((bins.weights[bin] as number) === 0) continue;
    const amplitude = fit.amplitude[bin] as number;
    const variance = fit.noise ** 2 + (MODEL_SHARE * amplitude) ** 2;
    const nats = (amplitude * ((lane[bin] as number) - (fit.dark[bin] as number) - (fit.glow[bin] as number) - amplitude / 2)) / variance;
    evidence[bin] = Number.isFinite(nats) ? Math.min(MOST_BIN_NATS, Math.max(-MOST_BIN_NATS, nats)) : 0;
  }
  return evidence;
}

/** The likeliest course of one lamp, 1 lit and 0 dark a bin, when each change costs a fixed amount (Viterbi 1967, two states). */
export function likeliestStates(evidence: Float64Array): Int8Array {
  const count = evidence.length;
  const fromOther = [new Uint8Array(count), new Uint8Array(count)] as const;
  let dark = 0;
  let lit = 0;
  for (let bin = 0; bin < count; bin += 1) {
    const nats = evidence[bin] as number;
    const darkBefore = dark;
    const litBefore = lit;
    if (litBefore - CHANGE_NATS > darkBefore) {
      dark = litBefore - CHANGE_NATS;
      fromOther[0][bin] = 1;
    }
    if (darkBefore - CHANGE_NATS > litBefore) {
      lit = darkBefore - CHANGE_NATS;
      fromOther[1][bin] = 1;
    }
    lit += nats / 2;
    dark -= nats / 2;
  }
  const states = new Int8Array(count);
  let state: 0 | 1 = lit > dark ? 1 : 0;
  for (let bin = count - 1; bin >= 0; bin -= 1) {
    states[bin] = state;
    if (fromOther[state][bin] === 1) state = state === 1 ? 0 : 1;
  }
  return states;
}
