import { mismatch, type Agreement } from './consensus.js';
import type { Piece } from './phases.js';

/** A code's stretch on the time axis, with what was seen in it. */
export interface CodeStretch {
  fromS: number;
  toS: number;
  onLit: number;
  offLit: number;
  /** Whole symbols, spoiled ones included. */
  wholeOn: number;
  wholeOff: number;
  /** Summed over the pieces that agree, nats, one a weighted lamp. */
  onEvidence: number[];
  offEvidence: number[];
  /** That the stretch is a code's at all. */
  probability: number;
  /** How long its phases usually last, seconds. */
  usualPhaseS: number;
  endsWithOn: boolean;
  /** It begins or ends beside other pieces, with no ready blink, darkness, mark or file's end between. */
  unbounded: boolean;
  pieces: Piece[];
}

/** More evidence than this against a piece showing the code, nats, and it is a spoiled one. */
const SPOILED_NATS = 4;

/** To compare a symbol at the file's edge with others takes two of them; edges are found to within this. */
const FEWEST_FULL = 2;
const FULL_LENGTH_SLACK_S = 0.03;

/** Whether a piece shows the code's pattern for its selector state. */
export function showsCode(piece: Piece, code: { onLit: number; offLit: number }): boolean {
  return piece.kind !== 'hole' && piece.evidence.length > 0 && mismatch(piece, code) <= SPOILED_NATS;
}

/**
 * Turns a run of agreeing pieces into stretches: pieces at its ends that don't show the code are left off; an interruption of a cycle or more
 * (and longer than the longest phase) makes two stretches of it; shorter ones count as the symbols that fit into their time.
 *
 * @param mostPhaseS the longest phase of the sheet, seconds
 */
export function stretchesOf(pieces: readonly Piece[], agreement: Agreement, mostPhaseS: number): CodeStretch[] {
  const run = pieces.slice(agreement.first, agreement.last + 1);
  const agreeing = run.map((piece) => showsCode(piece, agreement));
  const usualPhaseS = usualLength(run.filter((piece, index) => agreeing[index] && piece.kind === 'phase'));
  const mostInterruptionS = Math.max(mostPhaseS, 2 * usualPhaseS) + usualPhaseS;
  const parts: Piece[][] = [];
  let lastAgreeingEndS = Number.NEGATIVE_INFINITY;
  run.forEach((piece, index) => {
    if (agreeing[index] && piece.fromS - lastAgreeingEndS > mostInterruptionS) parts.push([]);
    parts.at(-1)?.push(piece);
    if (agreeing[index]) lastAgreeingEndS = piece.toS;
  });
  const unbounded = agreement.first > 0 || agreement.last < pieces.length - 1;
  return parts.map((part) => {
    const last = part.findLastIndex((piece) => showsCode(piece, agreement));
    return measure(part.slice(0, last + 1), agreement, usualPhaseS, unbounded);
  });
}

function measure(pieces: Piece[], agreement: Agreement, usualPhaseS: number, unbounded: boolean): CodeStretch {
  const lamps = pieces[0]?.evidence.length ?? 0;
  const stretch: CodeStretch = {
    fromS: pieces[0]?.fromS ?? 0,
    toS: pieces.at(-1)?.toS ?? 0,
    onLit: agreement.onLit,
    offLit: agreement.offLit,
    wholeOn: 0,
    wholeOff: 0,
    onEvidence: new Array<number>(lamps).fill(0),
    offEvidence: new Array<number>(lamps).fill(0),
    probability: agreement.probability,
    usualPhaseS,
    endsWithOn: pieces.at(-1)?.selectorLit ?? false,
    unbounded,
    pieces,
  };
  let before: Piece | undefined;
  let acrossHole = false;
  for (const piece of pieces) {
    acrossHole ||= piece.afterHole;
    const agrees = showsCode(piece, agreement);
    if (agrees && piece.kind !== 'fragment') {
      const evidence = piece.selectorLit ? stretch.onEvidence : stretch.offEvidence;
      piece.evidence.forEach((nats, lamp) => (evidence[lamp] = (evidence[lamp] as number) + nats));
    }
    if (!agrees || piece.kind === 'fragment') continue;
    if (before !== undefined && !acrossHole && !before.openEnd && !piece.openStart) countBetween(stretch, before, piece, usualPhaseS);
    if (piece.kind === 'phase' || isFullLength(piece, pieces)) countOne(stretch, piece.selectorLit);
    before = piece;
    acrossHole = false;
  }
  return stretch;
}

/**
 * A symbol at the file's start or end that lasts as long as the longest of its kind: the capture began or ended at its edge.
 * Beside a hole it is cut all the same.
 */
function isFullLength(piece: Piece, pieces: readonly Piece[]): boolean {
  const isFirst = piece === pieces[0] && piece.openStart && !piece.openEnd;
  const isLast = piece === pieces.at(-1) && piece.openEnd && !piece.openStart;
  const whole = pieces.filter((other) => other.kind === 'phase' && other.selectorLit === piece.selectorLit);
  const longestS = Math.max(...whole.map((other) => other.toS - other.fromS));
  return (isFirst || isLast) && whole.length >= FEWEST_FULL && piece.toS - piece.fromS >= longestS - FULL_LENGTH_SLACK_S;
}

/** Symbols that an interruption spoiled: as many as fit into its time and let the selector go on taking turns. */
function countBetween(stretch: CodeStretch, before: Piece, after: Piece, usualPhaseS: number): void {
  const fits = usualPhaseS > 0 ? (after.fromS - before.toS) / usualPhaseS : 0;
  const odd = before.selectorLit === after.selectorLit;
  const symbols = odd ? 2 * Math.round((fits - 1) / 2) + 1 : 2 * Math.round(fits / 2);
  // Two neighbours of the same selector state with nothing between are a restarted display, not a spoiled symbol.
  if (fits < 0.3) return;
  for (let symbol = 0; symbol < symbols; symbol += 1) countOne(stretch, (symbol % 2 === 0) !== before.selectorLit);
}

function countOne(stretch: CodeStretch, selectorLit: boolean): void {
  if (selectorLit) stretch.wholeOn += 1;
  else stretch.wholeOff += 1;
}

/** The median length of pieces, seconds; 0 of none. */
export function usualLength(pieces: readonly Piece[]): number {
  const lengths = pieces.map((piece) => piece.toS - piece.fromS).sort((a, b) => a - b);
  return lengths[lengths.length >> 1] ?? 0;
}
