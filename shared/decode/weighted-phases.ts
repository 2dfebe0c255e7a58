import type { WeightedPhases } from '../sheet/schema.js';
import type { PhaseView, Segment } from './answer.js';
import { cutBlocks, outsideReady, type Block } from './blocks.js';
import { absorbShort, cutCells, holesLongerThan } from './cells.js';
import { codePosterior, digitPatterns, litSum, type LampTrust } from './code-posterior.js';
import type { CodingInput, CodingReader, CodingReading } from './coding-reader.js';
import { agree, NO_CODE_IN_SERVICE_MODE, NO_CODE_UNPROVED, type ConsensusModel } from './consensus.js';
import type { LampLight } from './light-model.js';
import { MARK_REACH_S, placeMarks, splitAtRestarts } from './next-marks.js';
import { EvidenceSums, makePieces, measuredBand, type Piece } from './phases.js';
import { findReadyBlinks, type ReadyStretch } from './ready-blink.js';
import { stretchesOf, usualLength, type CodeStretch } from './stretches.js';
import { reasonForDoubt, reasonForNonsense, type LampKnowledge } from './unreadable-reason.js';

/** The chance that a lamp never seen lit is burnt out (contract, section 3). */
export const BURNT_OUT_PRIOR = 0.005;
/** The same where the noise could hide a dim lamp. */
const HIDDEN_PRIOR = 0.05;
/** Confidence is never stated higher than this (contract, section 3). */
const MOST_CONFIDENCE = 0.9999;
/** Candidates that are less likely than this help nobody. */
const LEAST_CANDIDATE = 0.01;
const MOST_CANDIDATES = 3;
/** Changes shorter than this are lag or glitches, and never more than this share of the shortest phase. */
const GLITCH_S = 0.25;
const GLITCH_SHARE = 0.3;
/** A hole longer than this share of a phase cuts the symbol (contract, section 3). */
const CUTTING_HOLE_SHARE = 0.5;
/** Darkness after a first digit counts as a second digit of 0 when it lasts this share of a phase; where the file ends in it, all of one. */
const ZERO_SHARE = 0.75;
const ZERO_SLACK_S = 0.05;
/** What no code explains is left out when it is hardly longer than one phase: the panel on its way to the next thing. */
const UNLISTED_PHASES = 1.1;
/** A code read so surely and so often proves service mode for the rest of the file. */
const PROVING_PROBABILITY = 0.999;
const PROVING_REPEATS = 3;

/** A code between others that changes without a mark must repeat: a single turn is what lamps blinking at random show too. */
const FEWEST_UNBOUNDED = 2;

interface Found {
  codes: CodeStretch[];
  /** Pieces no code explains, in runs. */
  nonsense: Piece[][];
}

/** Reads two phases that take turns; see decoder.md for the model. */
export const weightedPhasesReader: CodingReader = {
  neededLamps: (sheet) => (sheet.coding.kind === 'weighted-phases' ? [sheet.coding.selector, ...Object.keys(sheet.coding.weights)] : []),
  read: (input) => {
    if (input.sheet.coding.kind !== 'weighted-phases') throw new TypeError('this reader is for weighted-phases sheets');
    return readWeightedPhases(input, input.sheet.coding);
  },
};

function readWeightedPhases(input: CodingInput, coding: WeightedPhases): CodingReading {
  const { bins, lights, sheet } = input;
  const band = measuredBand(coding.phaseS, bins.exact);
  const weighted = Object.keys(coding.weights).map((id) => lights.get(id) as LampLight);
  const codingLamps = [lights.get(coding.selector) as LampLight, ...weighted];

  const readyLamps = (sheet.ready?.lamps ?? []).flatMap((id) => lights.get(id) ?? []).filter((lamp) => !lamp.unclear);
  const ready =
    sheet.ready === undefined || readyLamps.length === 0
      ? []
      : findReadyBlinks(
          cutCells(bins, readyLamps, holesLongerThan(bins, sheet.ready.periodS[0] / 2)),
          readyLamps.length,
          sheet.ready.periodS,
          bins.exact,
        );
  const deadLamps = deadLampsOf(ready, readyLamps);
  const know = (lamp: LampLight): LampKnowledge => ({
    id: lamp.id,
    dead: deadLamps.includes(lamp.id),
    everLit: lamp.everLit,
    unclear: lamp.unclear,
    steadyDoubt: lamp.changes ? 0 : lamp.steadyDoubt,
  });

  const sums = new EvidenceSums(bins, weighted);
  const usualPhaseS = usualPhase(input, codingLamps, coding);
  const holes = holesLongerThan(bins, CUTTING_HOLE_SHARE * usualPhaseS);
  const glitchS = Math.min(GLITCH_S, GLITCH_SHARE * coding.phaseS[0]);
  const cells = absorbShort(cutCells(bins, codingLamps, holes), glitchS);
  const regions = outsideReady(cells, ready).map((region) =>
    cutBlocks(makePieces(absorbShort(region, glitchS), sums, band), band, 2 * usualPhaseS),
  );
  const blocks = regions.flatMap((region) => region.blocks);

  const find = (model: ConsensusModel): Found[] => blocks.map((block) => findCodes(block, input, coding, weighted.length, band[1], model));
  let found = find(ready.length > 0 ? NO_CODE_IN_SERVICE_MODE : NO_CODE_UNPROVED);
  if (ready.length === 0 && found.some(({ codes }) => codes.some(provesServiceMode))) found = find(NO_CODE_IN_SERVICE_MODE);

  const segments: Segment[] = ready.map(({ fromS, toS }) => ({ kind: 'ready', fromS, toS }));
  for (const region of regions) {
    for (const dark of region.dark) {
      const block = region.blocks.find((candidate) => candidate.darkness === dark);
      const zero = block === undefined ? undefined : found[blocks.indexOf(block)]?.codes.at(-1);
      const fromS = Math.max(dark.fromS, zero?.toS ?? 0);
      if (dark.toS - fromS > 0) segments.push({ kind: 'dark', fromS, toS: dark.toS });
    }
    for (const { fromS, toS } of region.holes) {
      segments.push({
        kind: 'unreadable',
        fromS,
        toS,
        reason: `no samples came for ${(toS - fromS).toFixed(1)} s: check the probe's cable`,
        candidates: [],
      });
    }
  }
  const trust = weighted.map((lamp): LampTrust => {
    const { dead, everLit, steadyDoubt } = know(lamp);
    if (dead) return { burntOut: 1, swapped: 0 };
    return { burntOut: everLit ? 0 : lamp.couldHide ? HIDDEN_PRIOR : BURNT_OUT_PRIOR, swapped: Math.min(steadyDoubt, 0.5) };
  });
  for (const { codes, nonsense } of found) {
    for (const stretch of codes) segments.push(stateStretch(stretch, coding, trust, weighted.map(know), input.minConfidence));
    for (const pieces of nonsense) {
      const fromS = pieces[0]?.fromS ?? 0;
      const toS = pieces.at(-1)?.toS ?? 0;
      // Less than one phase is the panel on its way to the next thing; a whole phase is something that was shown.
      const short = toS - fromS <= Math.max(usualPhaseS, band[0]) * UNLISTED_PHASES;
      if (short && pieces.every((piece) => piece.kind !== 'phase')) continue;
      segments.push({
        kind: 'unreadable',
        fromS,
        toS,
        reason: reasonForNonsense(pieces, coding, know(codingLamps[0] as LampLight)),
        candidates: [],
      });
    }
  }
  return {
    segments,
    deadLamps,
    phases: blocks.flatMap((block) => phaseViews(block, coding)),
    warnings: markWarnings(input.nextMarksS, blocks, ready),
  };
}

function markWarnings(marksS: readonly number[], blocks: readonly Block[], ready: readonly ReadyStretch[]): string[] {
  const edgesS = [...blocks.flatMap((block) => block.pieces), ...ready].flatMap(({ fromS, toS }) => [fromS, toS]);
  return marksS
    .filter((markS) => edgesS.every((edgeS) => Math.abs(edgeS - markS) > MARK_REACH_S))
    .map((markS) => `the mark at ${markS.toFixed(1)} s is more than ${MARK_REACH_S} s from any change of the lamps: it changes nothing`);
}

function deadLampsOf(ready: readonly ReadyStretch[], readyLamps: readonly LampLight[]): string[] {
  if (ready.length === 0) return [];
  return readyLamps
    .filter((lamp, index) => ready.some((stretch) => ((stretch.lit >> index) & 1) === 0) && !lamp.everLit)
    .map((lamp) => lamp.id);
}

/** The median time between turns of the selector that the band allows; without any, a little more than the shortest phase. */
function usualPhase(input: CodingInput, codingLamps: readonly LampLight[], coding: WeightedPhases): number {
  const band = measuredBand(coding.phaseS, input.bins.exact);
  const turns = absorbShort(cutCells(input.bins, codingLamps.slice(0, 1), []), GLITCH_SHARE * coding.phaseS[0]);
  const lengths = turns.map((cell) => cell.toS - cell.fromS).filter((lengthS) => lengthS >= band[0] && lengthS <= band[1]);
  lengths.sort((a, b) => a - b);
  return lengths[lengths.length >> 1] ?? Math.min(1.25 * coding.phaseS[0], coding.phaseS[1]);
}

function findCodes(
  block: Block,
  input: CodingInput,
  coding: WeightedPhases,
  lampCount: number,
  mostPhaseS: number,
  model: ConsensusModel,
): Found {
  const shown = block.pieces.filter((piece) => piece.kind !== 'blank' && piece.kind !== 'hole');
  const pieces = splitAtRestarts(shown, input.nextMarksS, usualLength(shown.filter((piece) => piece.kind === 'phase')));
  const digits = new Set(digitPatterns(Object.values(coding.weights), coding.maxDigit).map(({ digit }) => digit)).size;
  const codes: CodeStretch[] = [];
  const nonsense: Piece[][] = [];
  const starts = [0, ...placeMarks(pieces, input.nextMarksS)];
  starts.forEach((start, index) => {
    const part = pieces.slice(start, starts[index + 1]);
    const explained = new Set<Piece>();
    const tail = index === starts.length - 1 ? tailOf(part, block) : [];
    for (const agreement of agree([...part, ...tail], digits ** 2, lampCount, model, input.bins.exact)) {
      for (const stretch of stretchesOf(part, agreement, mostPhaseS)) {
        stretch.pieces.forEach((piece) => explained.add(piece));
        codes.push(stretch);
      }
    }
    let run: Piece[] = [];
    for (const piece of part) {
      if (!explained.has(piece)) run.push(piece);
      else if (run.length > 0) {
        nonsense.push(run);
        run = [];
      }
    }
    if (run.length > 0) nonsense.push(run);
  });
  const last = codes.at(-1);
  if (last !== undefined && last.pieces.at(-1) === pieces.at(-1)) addHiddenZero(last, block);
  return { codes, nonsense };
}

/** The darkness after a block's last first digit, where it is long enough to hold a second digit of 0. */
function tailOf(part: readonly Piece[], block: Block): Piece[] {
  const last = part.at(-1);
  const darkness = block.darkness;
  if (darkness === undefined || last?.kind !== 'phase' || !last.selectorLit) return [];
  return darkness.toS - darkness.fromS >= ZERO_SHARE * (last.toS - last.fromS) ? [{ ...darkness, kind: 'tail' }] : [];
}

/** A code whose second digit is 0 ends in darkness that looks like what comes after it. */
function addHiddenZero(stretch: CodeStretch, block: Block): void {
  const darkness = block.darkness;
  if (darkness === undefined || stretch.offLit !== 0 || !stretch.endsWithOn || stretch.pieces.at(-1)?.openEnd === true) return;
  const lengthS = darkness.toS - darkness.fromS;
  const expectedS = expectedZeroS(stretch);
  stretch.toS = darkness.fromS + Math.min(lengthS, expectedS);
  if (lengthS >= (darkness.openEnd ? expectedS + ZERO_SLACK_S : ZERO_SHARE * expectedS)) stretch.wholeOff += 1;
}

/** How long the next dark phase would last: as the first digit's phase before it, in the proportion that the code has shown so far. */
function expectedZeroS(stretch: CodeStretch): number {
  const phases = stretch.pieces.filter((piece) => piece.kind === 'phase');
  const zeroS = usualLength(phases.filter((piece) => !piece.selectorLit));
  const firstS = usualLength(phases.filter((piece) => piece.selectorLit));
  const last = phases.at(-1);
  if (zeroS === 0 || firstS === 0 || last === undefined) return stretch.usualPhaseS;
  return ((last.toS - last.fromS) * zeroS) / firstS;
}

function repeatsOf(stretch: CodeStretch): number {
  return Math.min(stretch.wholeOn, stretch.wholeOff);
}

function provesServiceMode(stretch: CodeStretch): boolean {
  return stretch.probability > PROVING_PROBABILITY && repeatsOf(stretch) >= PROVING_REPEATS;
}

function stateStretch(
  stretch: CodeStretch,
  coding: WeightedPhases,
  trust: readonly LampTrust[],
  lamps: readonly LampKnowledge[],
  minConfidence: number,
): Segment {
  const { fromS, toS } = stretch;
  const candidates = codePosterior(coding, stretch.onEvidence, stretch.offEvidence, trust);
  const repeats = repeatsOf(stretch);
  const likeliest = candidates[0];
  const confidence = likeliest === undefined ? 0 : roundedDown(likeliest.probability * stretch.probability);
  const fewest = stretch.unbounded ? FEWEST_UNBOUNDED : 1;
  if (likeliest !== undefined && repeats >= fewest && confidence >= minConfidence) {
    return {
      kind: 'code',
      fromS,
      toS,
      code: likeliest.code,
      digits: { on: likeliest.onDigit, off: likeliest.offDigit },
      repeats,
      confidence,
    };
  }
  return {
    kind: 'unreadable',
    fromS,
    toS,
    reason: reasonForDoubt(stretch, coding, lamps, candidates, repeats),
    candidates: candidates
      .map(({ code, probability }) => ({ code, confidence: roundedDown(probability * stretch.probability) }))
      .filter((candidate) => candidate.confidence >= LEAST_CANDIDATE)
      .slice(0, MOST_CANDIDATES),
  };
}

/** Four decimals, down: a stated confidence is never more than the model's. */
function roundedDown(probability: number): number {
  return Math.max(0, Math.min(MOST_CONFIDENCE, Math.floor(probability * 1e4 + 1e-9) / 1e4));
}

function phaseViews(block: Block, coding: WeightedPhases): PhaseView[] {
  const weights = Object.values(coding.weights);
  return block.pieces
    .filter((piece) => piece.kind === 'phase' || piece.kind === 'cut')
    .map((piece) => {
      const digit = litSum(weights, piece.lit);
      return {
        fromS: piece.fromS,
        toS: piece.toS,
        selectorLit: piece.selectorLit,
        digit: digit <= coding.maxDigit ? digit : null,
        whole: piece.kind === 'phase',
      };
    });
}
