import type { Piece } from './phases.js';

/** A `next` mark counts at the phase edge nearest to it within this time (contract, section 3). */
export const MARK_REACH_S = 1.5;
/** So many phases on each side tell whether the code changes at an edge. */
const LOOK_PHASES = 4;

/**
 * Puts each `next` mark on an edge between two pieces. That is the nearest edge within 1.5 s, unless the digits change at another edge within
 * reach and not there: a person presses early or late.
 *
 * @param marksS times of the marks, seconds
 * @returns indexes: the piece at each is the first of a new stretch; in order, none twice
 */
export function placeMarks(pieces: readonly Piece[], marksS: readonly number[]): number[] {
  const splits: number[] = [];
  marksS.forEach((markS, order) => {
    const within = pieces
      .map((_, index) => ({ index, distanceS: index === 0 ? Infinity : distanceToEdge(pieces, index, markS) }))
      .filter(({ index, distanceS }) => distanceS <= MARK_REACH_S && index >= (splits.at(-1) ?? 0))
      .sort((a, b) => a.distanceS - b.distanceS);
    const nearest = within[0];
    // Pressed twice at the same edge is pressed once.
    if (nearest === undefined || nearest.index === splits.at(-1) || endIsNearer(pieces, markS, nearest.distanceS)) return;
    const nextS = marksS[order + 1] ?? Infinity;
    const from = splits.at(-1) ?? 0;
    let chosen = nearest.index;
    let fewest = disagreement(pieces, from, nearest.index, nextS);
    for (const { index } of within.slice(1)) {
      if (index === splits.at(-1)) continue;
      const here = disagreement(pieces, from, index, nextS);
      if (here < fewest) {
        chosen = index;
        fewest = here;
      }
    }
    splits.push(chosen);
  });
  return splits;
}

/** How far a mark is from the edge before a piece; where the panel pauses there, from the nearer end of the pause. */
function distanceToEdge(pieces: readonly Piece[], index: number, markS: number): number {
  const edges = [pieces[index]?.fromS, pieces[index - 1]?.toS].filter((edge) => edge !== undefined);
  return Math.min(...edges.map((edge) => Math.abs(edge - markS)));
}

/** A mark nearest to the very first or last edge stands where the stretch begins or ends anyway. */
function endIsNearer(pieces: readonly Piece[], markS: number, distanceS: number): boolean {
  const startS = pieces[0]?.fromS ?? Infinity;
  const endS = pieces.at(-1)?.toS ?? Infinity;
  return Math.abs(startS - markS) < distanceS || Math.abs(endS - markS) < distanceS;
}

/** How many phases near the edge differ from their own side, between the mark before and the one after: 0 when each side shows one code. */
function disagreement(pieces: readonly Piece[], from: number, split: number, nextS: number): number {
  const before = pieces.slice(Math.max(from, split - LOOK_PHASES), split);
  const after = pieces.slice(split, split + LOOK_PHASES).filter((piece) => (piece.fromS + piece.toS) / 2 < nextS);
  return differing(before) + differing(after);
}

function differing(side: readonly Piece[]): number {
  let count = 0;
  for (const selectorLit of [true, false]) {
    const patterns = side.filter((piece) => piece.kind === 'phase' && piece.selectorLit === selectorLit).map((piece) => piece.lit);
    count += Math.max(0, new Set(patterns).size - 1);
  }
  return count;
}

/** A piece this much longer than a phase, with a mark in it, is two: the display began anew with the same first digit. */
const RESTART_SHARE = 1.25;
const RESTART_REACH_S = 0.6;

/**
 * Cuts pieces in which the display began anew: longer than a phase, a `next` mark about one phase before their end. What stands before the cut
 * is a cut symbol's rest, what comes after it a phase.
 */
export function splitAtRestarts(pieces: readonly Piece[], marksS: readonly number[], usualPhaseS: number): Piece[] {
  return pieces.flatMap((piece): Piece[] => {
    const lengthS = piece.toS - piece.fromS;
    if (piece.openEnd || lengthS <= RESTART_SHARE * usualPhaseS || lengthS > 2 * usualPhaseS) return [piece];
    const cutS = piece.toS - usualPhaseS;
    if (!marksS.some((markS) => Math.abs(markS - cutS) <= RESTART_REACH_S && markS > piece.fromS && markS < piece.toS)) return [piece];
    return [
      { ...piece, kind: 'fragment', toS: cutS },
      { ...piece, kind: 'phase', fromS: cutS, openStart: false, afterHole: false },
    ];
  });
}
