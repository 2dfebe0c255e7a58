import type { Bins } from './bin-levels.js';
import { findSteps, NOT_TOLD, type Steps } from './find-steps.js';
import { fitLevels, type Glow, type LevelFit, type LevelScale } from './fit-levels.js';
import { solveSymmetric } from './solve-symmetric.js';
import { likeliestStates, litEvidence, MOST_BIN_NATS } from './lamp-states.js';

/** What is known of one lamp's light in a capture. */
export interface LampLight {
  id: string;
  /** 1 lit, 0 dark, one value a bin. */
  states: Int8Array;
  /** Log-likelihood ratio of lit against dark, nats, one value a bin. */
  evidence: Float64Array;
  fit: LevelFit;
  /** Whether its light ever stepped up or down. */
  changes: boolean;
  everLit: boolean;
  /** The probability that a lamp that never changed is taken for the wrong state, steadily; 0 when it changed. */
  steadyDoubt: number;
  /** It changes, but too weakly for the noise to trust when: it has no states and no evidence. */
  unclear: boolean;
  /** It was never seen lit, and in this noise a dim lamp could have been missed. */
  couldHide: boolean;
}

const ROUNDS = 3;
/** A lamp's fitted amplitude is a little below its largest steps: it must reach this share of a clear step. */
const CLEAR_SHARE = 0.85;
/** A dim lamp, as a share of full scale, that must not hide in the noise. */
const DIM_LAMP = 0.15;
/** What adds less than this share of full scale, the neighbours' glow taken out, is no lamp. */
const LEAST_LAMP = 0.04;
/** Bins this near a change of state are left out of a fit: lamps warm up and go out over tens of milliseconds. */
const EDGE_BEFORE_BINS = 1;
const EDGE_AFTER_BINS = 3;
/** A lamp weaker than this share of its brightest neighbour may be no lamp but that neighbour's glow. */
const MAYBE_GLOW = 0.4;
/** Glow is believed in up to this share of a neighbour, or 1.5 times what other lamps of the capture show. */
const USUAL_GLOW = 0.04;
/** A lamp below this share of its brightest neighbour is looked at again with the glow taken out, if there is this much of it. */
const DIM_BESIDE_BRIGHT = 0.6;
const LEAST_GLOW = 0.015;
/** Pure glow must explain the light: no more than this share of what the lamp seemed to add may be left over. */
const GLOW_LEFT_SHARE = 0.3;
const SHARE_EVENLY = 0.01;
/** The glow that is usual in a capture: what most pairs of lamps show at most. */
const USUAL_GLOW_QUANTILE = 0.7;
/** A steady level, when no lamp of the file gives a measure: ambient light is about so much of full scale, ± so much. */
const AMBIENT_SHARE = 0.08;
const AMBIENT_SPREAD = 0.1;
/** With other lamps to compare: their dark levels, and at least this spread. */
const LEAST_AMBIENT_SPREAD = 0.05;
/** A steady lamp that is lit stands out from the others' dark level by this share of full scale; less is all but excluded. */
const LEAST_STEADY_LIGHT = 0.1;
const HIDDEN_LIGHT_DENSITY = 1e-5;

/**
 * Finds each lamp's two levels, their slow drift, the glow of its neighbours, and from these when it was lit.
 *
 * First from steps alone, then by turns: states from levels, levels from states. Lamps must be in panel order: the ones beside each other
 * glow into each other. A lamp that never steps is lit or dark by comparison with the others' dark levels, with a stated doubt.
 */
export function modelLight(bins: Bins, ids: readonly string[], fullScale: number): LampLight[] {
  if (bins.exact) return ids.map((id, lamp) => typedLight(bins, id, bins.levels[lamp] as Float64Array, fullScale));
  const lanes = bins.levels;
  const steps = lanes.map((lane) => findSteps(bins, lane, fullScale));
  const lamps: LampLight[] = ids.map((id, lamp) => {
    const lane = lanes[lamp] as Float64Array;
    const { labels, noise, stepSize } = steps[lamp] as Steps;
    if (stepSize === undefined) return steadyLight(bins, id, lane, fullScale, noise);
    return steppingLight(bins, id, lane, labels, [], { fullScale, noise, amplitude: stepSize });
  });
  for (let round = 1; round < ROUNDS; round += 1) {
    lamps.forEach((lamp, index) => {
      if (!lamp.changes) return;
      const glows = neighboursOf(lamps, index).map(glowOf);
      const lane = lanes[index] as Float64Array;
      const scale = { fullScale, noise: (steps[index] as Steps).noise, amplitude: mean(lamp.fit.amplitude) };
      lamps[index] = steppingLight(bins, lamp.id, lane, awayFromEdges(lamp.states), glows, scale);
    });
  }
  lookAgainBesideBright(bins, lanes, lamps, steps, fullScale);
  lamps.forEach((lamp, index) => {
    if (!lamp.changes || mean(lamp.fit.amplitude) >= LEAST_LAMP * fullScale) return;
    const withoutGlow = (lanes[index] as Float64Array).map((level, bin) => level - (lamp.fit.glow[bin] as number));
    lamps[index] = steadyLight(bins, lamp.id, withoutGlow, fullScale, lamp.fit.noise);
  });
  const glowShares = lamps.flatMap((lamp) => (lamp.changes ? lamp.fit.glowShares : []));
  const usualGlow = Math.max(USUAL_GLOW, 1.5 * quantile(glowShares, USUAL_GLOW_QUANTILE));
  lamps.forEach((lamp, index) => {
    const withoutGlow = lamp.changes ? laneWithoutGlow(bins, lanes[index] as Float64Array, lamps, index, usualGlow) : undefined;
    if (withoutGlow !== undefined) lamps[index] = steadyLight(bins, lamp.id, withoutGlow, fullScale, lamp.fit.noise);
  });
  compareSteadyLamps(lamps, lanes, fullScale);
  lamps.forEach((lamp, index) => {
    const { clearStep } = steps[index] as Steps;
    lamp.couldHide = !lamp.everLit && clearStep > DIM_LAMP * fullScale;
    if (lamp.changes && mean(lamp.fit.amplitude) < CLEAR_SHARE * clearStep) markUnclear(lamp);
  });
  return lamps;
}

/**
 * A dim lamp's steps drown in those of bright lamps beside it. Once the bright ones are known, and how much they glow in this capture, their
 * light is taken out of the dim lamp's lane and its steps are looked for again.
 */
function lookAgainBesideBright(bins: Bins, lanes: readonly Float64Array[], lamps: LampLight[], steps: Steps[], fullScale: number): void {
  const isDim = (index: number): boolean => {
    const brightest = Math.max(0, ...neighboursOf(lamps, index).map((neighbour) => mean(neighbour.fit.amplitude)));
    return (lamps[index] as LampLight).changes && mean((lamps[index] as LampLight).fit.amplitude) < DIM_BESIDE_BRIGHT * brightest;
  };
  const dim = lamps.map((_, index) => index).filter(isDim);
  const glowShare = quantile(
    lamps.flatMap((lamp, index) => (lamp.changes && !dim.includes(index) ? lamp.fit.glowShares : [])),
    USUAL_GLOW_QUANTILE,
  );
  if (glowShare < LEAST_GLOW) return;
  for (const index of dim) {
    const lamp = lamps[index] as LampLight;
    const lane = lanes[index] as Float64Array;
    const glows = neighboursOf(lamps, index).map(glowOf);
    const own = lane.map((level, bin) => level - glowShare * glows.reduce((sum, glow) => sum + (glow[bin] as number), 0));
    const found = findSteps(bins, own, fullScale);
    steps[index] = found;
    if (found.stepSize === undefined) {
      lamps[index] = steadyLight(bins, lamp.id, own, fullScale, found.noise);
      continue;
    }
    let labels = found.labels;
    for (let round = 0; round < ROUNDS; round += 1) {
      const again = steppingLight(bins, lamp.id, lane, labels, glows, { fullScale, noise: found.noise, amplitude: found.stepSize });
      lamps[index] = again;
      labels = awayFromEdges(again.states);
    }
  }
}

function steppingLight(
  bins: Bins,
  id: string,
  lane: Float64Array,
  labels: Int8Array,
  glows: readonly Glow[],
  scale: LevelScale,
): LampLight {
  const fit = fitLevels(bins, lane, labels, glows, scale);
  const evidence = litEvidence(bins, lane, fit);
  const states = likeliestStates(evidence);
  const everLit = states.includes(1);
  return { id, states, evidence, fit, changes: everLit && states.includes(0), everLit, steadyDoubt: 0, unclear: false, couldHide: false };
}

/** A lamp whose light never steps: its level is known, its state is told later by comparison. */
function steadyLight(bins: Bins, id: string, lane: Float64Array, fullScale: number, noise: number): LampLight {
  const labels = new Int8Array(lane.length).fill(0);
  const fit = fitLevels(bins, lane, labels, [], { fullScale, noise, amplitude: 0 });
  fit.amplitude.fill(0);
  return {
    id,
    states: labels,
    evidence: new Float64Array(lane.length),
    fit,
    changes: false,
    everLit: false,
    steadyDoubt: 0.5,
    unclear: false,
    couldHide: false,
  };
}

function typedLight(bins: Bins, id: string, lane: Float64Array, fullScale: number): LampLight {
  const states = Int8Array.from(lane, (level) => (level * 2 > fullScale ? 1 : 0));
  const evidence = Float64Array.from(
    lane,
    (level, bin) => (level * 2 > fullScale ? 1 : -1) * MOST_BIN_NATS * (bins.weights[bin] as number),
  );
  const flat = (value: number): Float64Array => new Float64Array(lane.length).fill(value);
  const everLit = states.includes(1);
  return {
    id,
    states,
    evidence,
    fit: { dark: flat(0), amplitude: flat(fullScale), glow: flat(0), glowShares: [], noise: 0 },
    changes: everLit && states.includes(0),
    everLit,
    steadyDoubt: 0,
    unclear: false,
    couldHide: false,
  };
}

function markUnclear(lamp: LampLight): void {
  lamp.unclear = true;
  lamp.states.fill(0);
  lamp.evidence.fill(0);
}

function neighboursOf(lamps: readonly LampLight[], index: number): LampLight[] {
  return [lamps[index - 1], lamps[index + 1]].filter((lamp) => lamp !== undefined && lamp.changes) as LampLight[];
}

function glowOf(lamp: LampLight): Glow {
  const glow = new Float64Array(lamp.states.length);
  for (let bin = 0; bin < glow.length; bin += 1) if (lamp.states[bin] === 1) glow[bin] = lamp.fit.amplitude[bin] as number;
  return glow;
}

function awayFromEdges(states: Int8Array): Int8Array {
  const labels = Int8Array.from(states);
  for (let bin = 1; bin < states.length; bin += 1) {
    if (states[bin] === states[bin - 1]) continue;
    for (let near = Math.max(0, bin - EDGE_BEFORE_BINS); near < Math.min(states.length, bin + EDGE_AFTER_BINS); near += 1) {
      labels[near] = NOT_TOLD;
    }
  }
  return labels;
}

/**
 * Takes the neighbours' light out of a lane where what looks like a weak lamp is only that: their light alone, in shares no larger than usual,
 * must leave next to nothing of the difference between its lit and its dark bins. Undefined where it doesn't: the lamp lights by itself.
 */
function laneWithoutGlow(
  bins: Bins,
  lane: Float64Array,
  lamps: readonly LampLight[],
  index: number,
  usualGlow: number,
): Float64Array | undefined {
  const lamp = lamps[index] as LampLight;
  const glows = neighboursOf(lamps, index).map(glowOf);
  const brightest = Math.max(0, ...neighboursOf(lamps, index).map((neighbour) => mean(neighbour.fit.amplitude)));
  if (brightest === 0 || mean(lamp.fit.amplitude) > MAYBE_GLOW * brightest) return undefined;
  const labels = awayFromEdges(lamp.states);
  labels.forEach((_, bin) => {
    if ((bins.weights[bin] as number) === 0) labels[bin] = NOT_TOLD;
  });
  const light = lane.map((level, bin) => level - (lamp.fit.dark[bin] as number));
  const shares = glowSharesOf(light, labels, glows);
  if (shares.some((share) => share > usualGlow)) return undefined;
  const left = [0, 0];
  const counts = [0, 0];
  let own = 0;
  const glow = lane.map((_, bin) =>
    glows.reduce((sum, neighbour, which) => sum + (shares[which] as number) * (neighbour[bin] as number), 0),
  );
  labels.forEach((label, bin) => {
    if (label < 0) return;
    left[label] = (left[label] as number) + (light[bin] as number) - (glow[bin] as number);
    counts[label] = (counts[label] as number) + 1;
    if (label === 1) own += lamp.fit.amplitude[bin] as number;
  });
  const [darkCount = 0, litCount = 0] = counts;
  if (darkCount === 0 || litCount === 0) return undefined;
  const unexplained = (left[1] as number) / litCount - (left[0] as number) / darkCount;
  return unexplained <= (GLOW_LEFT_SHARE * own) / litCount ? lane.map((level, bin) => level - (glow[bin] as number)) : undefined;
}

/** The shares of the neighbours' light that explain a lane best: least squares, none below zero. */
function glowSharesOf(light: Float64Array, labels: Int8Array, glows: readonly Glow[]): number[] {
  const size = glows.length;
  const matrix = new Float64Array(size * size);
  const right = new Float64Array(size);
  labels.forEach((label, bin) => {
    if (label < 0) return;
    for (let row = 0; row < size; row += 1) {
      const here = glows[row]?.[bin] ?? 0;
      right[row] = (right[row] as number) + here * (light[bin] as number);
      for (let column = 0; column <= row; column += 1) {
        matrix[row * size + column] = (matrix[row * size + column] as number) + here * (glows[column]?.[bin] ?? 0);
      }
    }
  });
  // Lamps that only ever blink together can't be told apart: a little weight on small shares divides the light among them.
  const brightest = Math.max(0, ...right.map((_, row) => matrix[row * size + row] as number));
  for (let row = 0; row < size; row += 1) matrix[row * size + row] = (matrix[row * size + row] as number) + SHARE_EVENLY * brightest;
  const shares = [...solveSymmetric(Float64Array.from(matrix), Float64Array.from(right))];
  const negative = shares.findIndex((share) => share < 0);
  if (negative < 0) return shares;
  const rest = glows.filter((_, which) => which !== negative);
  const others = rest.length === 0 ? [] : glowSharesOf(light, labels, rest);
  return [...others.slice(0, negative), 0, ...others.slice(negative)];
}

/**
 * Tells lit from dark for lamps that never stepped. Dark levels are taken as normal around those of the other lamps, a lit level as
 * anywhere above; each equally likely beforehand.
 */
function compareSteadyLamps(lamps: readonly LampLight[], lanes: readonly Float64Array[], fullScale: number): void {
  const references = lamps.filter((lamp) => lamp.changes).map((lamp) => mean(lamp.fit.dark) / fullScale);
  const centre = references.length > 0 ? mean(references) : AMBIENT_SHARE;
  const scatter =
    references.length > 1 ? Math.sqrt(references.reduce((sum, level) => sum + (level - centre) ** 2, 0) / (references.length - 1)) : 0;
  const spread = references.length > 0 ? Math.max(LEAST_AMBIENT_SPREAD, 1.5 * scatter) : AMBIENT_SPREAD;
  lamps.forEach((lamp, index) => {
    if (lamp.changes) return;
    const level = mean(lamp.fit.dark) / fullScale;
    const above = Math.max(0, (level - centre) / spread);
    const darkDensity = Math.exp(-(above ** 2) / 2) / (spread * Math.sqrt(2 * Math.PI));
    const litDensity = level > centre + LEAST_STEADY_LIGHT ? 1 / Math.max(0.1, 1 - centre - LEAST_STEADY_LIGHT) : HIDDEN_LIGHT_DENSITY;
    const probabilityLit = litDensity / (litDensity + darkDensity);
    const lit = probabilityLit > 0.5;
    lamp.steadyDoubt = Math.min(probabilityLit, 1 - probabilityLit);
    lamp.everLit = lit;
    lamp.states.fill(lit ? 1 : 0);
    lamp.evidence.fill(lit ? MOST_BIN_NATS : -MOST_BIN_NATS);
    if (lit) {
      lamp.fit.amplitude.fill(Math.max(0, mean(lanes[index] as Float64Array) - centre * fullScale));
      lamp.fit.dark.fill(centre * fullScale);
    }
  });
}

function mean(values: ArrayLike<number>): number {
  let sum = 0;
  for (let index = 0; index < values.length; index += 1) sum += values[index] as number;
  return values.length === 0 ? 0 : sum / values.length;
}

function quantile(values: readonly number[], share: number): number {
  const sorted = [...values].sort((a, b) => a - b);
  return sorted[Math.min(sorted.length - 1, Math.floor(share * sorted.length))] ?? 0;
}
