import type { Band } from '../sheet/schema.js';
import type { Bins } from './bin-levels.js';
import type { Cell } from './cells.js';
import type { LampLight } from './light-model.js';

/** A piece of the panel's display, between two changes. */
export interface Piece {
  /**
   * phase: as long as the sheet says, both edges seen; cut: no longer than that, an edge not seen; blank: every lamp dark beside a phase
   * whose selector is dark too; tail: the darkness that ends a block, which may hold a second digit of 0; fragment: too short or too long;
   * hole: no samples.
   */
  kind: 'phase' | 'cut' | 'blank' | 'tail' | 'fragment' | 'hole';
  fromS: number;
  toS: number;
  selectorLit: boolean;
  /** Bit k: the k-th weighted lamp is lit. */
  lit: number;
  /** Log-likelihood ratio of lit against dark over the whole piece, nats, one a weighted lamp, within ±10. */
  evidence: number[];
  openStart: boolean;
  openEnd: boolean;
  /** Samples are missing just before it. */
  afterHole: boolean;
}

/** Bins within one piece are not independent (flicker, drift): their evidence counts half. */
const INDEPENDENT_SHARE = 0.5;
/** Whatever the noise, a lamp is misread over a whole piece once in e^10 = 22 000 times: what the model does not know of. */
const MOST_PIECE_NATS = 10;
/** Lamps warm up and go out: this much at both ends of a piece says little. */
const EDGE_S = 0.06;
/** An edge is found to within this; by hand, a person's reaction varies by more. */
export const EDGE_SLACK_S = 0.06;
const EDGE_SLACK_BY_HAND_S = 0.3;
/** One pattern must hold this share of a selector run for the rest to be a glitch. */
const MAIN_SHARE = 0.6;
/** A cut piece shorter than this says nothing. */
const LEAST_CUT_S = 0.15;

/** How long a phase may last as measured: the sheet's band and what edges are uncertain by. */
export function measuredBand(phaseS: Band, byHand: boolean): Band {
  const slackS = byHand ? EDGE_SLACK_BY_HAND_S : EDGE_SLACK_S;
  return [phaseS[0] - slackS, phaseS[1] + slackS];
}

/** Sums each lamp's evidence over any stretch of time in constant time. */
export class EvidenceSums {
  readonly #startsS: Float64Array;
  readonly #endsS: Float64Array;
  readonly #sums: Float64Array[];

  constructor(bins: Bins, lamps: readonly LampLight[]) {
    this.#startsS = bins.startsS;
    this.#endsS = bins.endsS;
    this.#sums = lamps.map((lamp) => {
      const sums = new Float64Array(lamp.evidence.length + 1);
      lamp.evidence.forEach((nats, bin) => (sums[bin + 1] = (sums[bin] as number) + nats));
      return sums;
    });
  }

  over(fromS: number, toS: number): number[] {
    const edgeS = Math.min(EDGE_S, (toS - fromS) / 4);
    const from = this.#position(fromS + edgeS);
    const to = this.#position(toS - edgeS);
    return this.#sums.map((sums) => {
      const nats = INDEPENDENT_SHARE * (valueAt(sums, to) - valueAt(sums, from));
      return Math.min(MOST_PIECE_NATS, Math.max(-MOST_PIECE_NATS, nats));
    });
  }

  /** A time as a bin's index and the share of that bin before it: a bin's evidence is spread evenly over its time. */
  #position(timeS: number): number {
    let low = 0;
    let high = this.#startsS.length;
    while (low < high) {
      const middle = (low + high) >> 1;
      if ((this.#startsS[middle] as number) <= timeS) low = middle + 1;
      else high = middle;
    }
    const bin = low - 1;
    if (bin < 0) return 0;
    const startS = this.#startsS[bin] as number;
    const lengthS = (this.#endsS[bin] as number) - startS;
    return bin + (lengthS > 0 ? Math.min(1, (timeS - startS) / lengthS) : 0);
  }
}

function valueAt(sums: Float64Array, position: number): number {
  const index = Math.floor(position);
  const share = position - index;
  const here = sums[index] as number;
  return share === 0 ? here : here + share * ((sums[index + 1] as number) - here);
}

/**
 * Makes pieces of cells. A cell's bit 0 is the selector, the bits above it the weighted lamps in order.
 *
 * Where the selector holds still as long as one phase while another lamp glitches, the run is one phase; its evidence is that of the whole run.
 */
export function makePieces(cells: readonly Cell[], sums: EvidenceSums, band: Band): Piece[] {
  const pieces: Piece[] = [];
  for (let index = 0; index < cells.length;) {
    const run = selectorRun(cells, index);
    index += run.length;
    for (const cell of isOnePhase(run, band) ? [joined(run)] : run) pieces.push(pieceOf(cell, sums, band));
  }
  markBlanks(pieces);
  pieces.forEach((piece, index) => (piece.afterHole = pieces[index - 1]?.kind === 'hole'));
  return pieces;
}

function selectorRun(cells: readonly Cell[], start: number): Cell[] {
  const first = cells[start] as Cell;
  const run = [first];
  if (first.hole) return run;
  for (let index = start + 1; index < cells.length; index += 1) {
    const cell = cells[index] as Cell;
    if (cell.hole || (cell.lit & 1) !== (first.lit & 1)) break;
    run.push(cell);
  }
  return run;
}

function isOnePhase(run: readonly Cell[], band: Band): boolean {
  const first = run[0] as Cell;
  const last = run.at(-1) as Cell;
  const lengthS = last.toS - first.fromS;
  if (run.length < 2 || lengthS > band[1] || lengthS < band[0]) return false;
  // Darkness at an end of a dark-selector run is a pause of the panel, not part of the phase.
  if (first.lit === 0 || last.lit === 0) return false;
  if (run.filter((cell) => cell.toS - cell.fromS >= band[0]).length > 1) return false;
  return Math.max(...sharesOf(run).values()) >= MAIN_SHARE * lengthS;
}

function sharesOf(run: readonly Cell[]): Map<number, number> {
  const shares = new Map<number, number>();
  for (const cell of run) shares.set(cell.lit, (shares.get(cell.lit) ?? 0) + cell.toS - cell.fromS);
  return shares;
}

function joined(run: readonly Cell[]): Cell {
  const first = run[0] as Cell;
  const last = run.at(-1) as Cell;
  const [lit] = [...sharesOf(run)].reduce((most, entry) => (entry[1] > most[1] ? entry : most));
  return { fromS: first.fromS, toS: last.toS, lit, openStart: first.openStart, openEnd: last.openEnd, hole: false };
}

function pieceOf(cell: Cell, sums: EvidenceSums, band: Band): Piece {
  const lengthS = cell.toS - cell.fromS;
  const open = cell.openStart || cell.openEnd;
  const kind = cell.hole
    ? 'hole'
    : !open && lengthS >= band[0] && lengthS <= band[1]
      ? 'phase'
      : open && lengthS >= LEAST_CUT_S && lengthS <= band[1]
        ? 'cut'
        : 'fragment';
  return {
    kind,
    fromS: cell.fromS,
    toS: cell.toS,
    selectorLit: (cell.lit & 1) === 1,
    lit: cell.lit >> 1,
    evidence: cell.hole ? [] : sums.over(cell.fromS, cell.toS),
    openStart: cell.openStart,
    openEnd: cell.openEnd,
    afterHole: false,
  };
}

function markBlanks(pieces: readonly Piece[]): void {
  pieces.forEach((piece, index) => {
    if (!isDark(piece)) return;
    const beside = [pieces[index - 1], pieces[index + 1]];
    if (beside.some((other) => other !== undefined && other.kind !== 'hole' && !other.selectorLit)) piece.kind = 'blank';
  });
}

/** Whether every lamp of the coding is dark in it. */
export function isDark(piece: Piece): boolean {
  return piece.kind !== 'hole' && !piece.selectorLit && piece.lit === 0;
}
