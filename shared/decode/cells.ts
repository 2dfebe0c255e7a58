import type { Bins } from './bin-levels.js';
import type { LampLight } from './light-model.js';

/** A stretch of time in which none of the watched lamps changes. */
export interface Cell {
  fromS: number;
  toS: number;
  /** Bit k: the k-th watched lamp is lit. */
  lit: number;
  /** The edge was not seen: the capture starts or ends here, or samples are missing. */
  openStart: boolean;
  openEnd: boolean;
  /** No samples at all. */
  hole: boolean;
}

/** A time without samples. */
export interface Hole {
  fromS: number;
  toS: number;
}

/** Lamps that change together are seen to within this, seconds: by the probe, and by a hand that taps one lamp after the other. */
const TOGETHER_S = 0.12;
const TOGETHER_BY_HAND_S = 0.3;

const SLIVER_S = 0.06;

/** The holes of a capture that are longer than `leastS`. */
export function holesLongerThan(bins: Bins, leastS: number): Hole[] {
  const holes: Hole[] = [];
  bins.weights.forEach((weight, bin) => {
    const fromS = bins.startsS[bin] as number;
    const toS = bins.endsS[bin] as number;
    if (weight === 0 && toS - fromS > leastS) holes.push({ fromS, toS });
  });
  return holes;
}

/**
 * Cuts the capture into cells at every change of the watched lamps; changes within 0.12 s of one another are one change, at the time of
 * the first lamp of the list (the selector) if it takes part. Long holes are cells of their own.
 */
export function cutCells(bins: Bins, lamps: readonly LampLight[], holes: readonly Hole[]): Cell[] {
  const count = bins.startsS.length;
  if (count === 0) return [];
  const together = bins.exact ? TOGETHER_BY_HAND_S : TOGETHER_S;
  const litAt = (bin: number): number => lamps.reduce((lit, lamp, index) => (lamp.states[bin] === 1 ? lit | (1 << index) : lit), 0);
  const cells: Cell[] = [];
  let current: Cell = { fromS: bins.startsS[0] as number, toS: 0, lit: litAt(0), openStart: true, openEnd: false, hole: false };
  const holeStarts = new Map(holes.map((hole) => [hole.fromS, hole]));
  let before = current.lit;
  let clusterEndS = Number.NEGATIVE_INFINITY;
  let led = false;
  let changed = 0;
  const close = (atS: number, open: boolean): void => {
    current.toS = atS;
    current.openEnd = open;
    if (current.toS > current.fromS || current.hole) cells.push(current);
  };
  for (let bin = 0; bin < count; bin += 1) {
    const startS = bins.startsS[bin] as number;
    const hole = bins.weights[bin] === 0 ? holeStarts.get(startS) : undefined;
    const lit = litAt(bin);
    if (hole !== undefined) {
      close(startS, true);
      cells.push({ fromS: hole.fromS, toS: hole.toS, lit: 0, openStart: true, openEnd: true, hole: true });
      const next = Math.min(bin + 1, count - 1);
      before = litAt(next);
      current = { fromS: hole.toS, toS: hole.toS, lit: before, openStart: true, openEnd: false, hole: false };
      clusterEndS = Number.NEGATIVE_INFINITY;
      continue;
    }
    if (lit === before) continue;
    const leads = ((lit ^ before) & 1) === 1;
    // A lamp that changes back begins a new change, however soon.
    if (startS <= clusterEndS && ((lit ^ before) & changed) === 0) {
      // The same change goes on: the cell that just began takes the newer pattern, and the selector's time.
      current.lit = lit;
      if (leads && !led) {
        const last = cells.at(-1);
        if (last !== undefined && last.toS === current.fromS && !last.hole) last.toS = startS;
        current.fromS = startS;
        led = true;
      }
    } else {
      close(startS, false);
      current = { fromS: startS, toS: startS, lit, openStart: false, openEnd: false, hole: false };
      clusterEndS = startS + together;
      led = leads;
      changed = 0;
    }
    changed |= lit ^ before;
    before = lit;
  }
  close(bins.endsS[count - 1] as number, true);
  return joinAlike(cells);
}

/** Joins neighbours with the same pattern where the edge between them is no edge. */
export function joinAlike(cells: readonly Cell[]): Cell[] {
  const joined: Cell[] = [];
  for (const cell of cells) {
    const last = joined.at(-1);
    if (last !== undefined && !last.hole && !cell.hole && last.lit === cell.lit && !last.openEnd && !cell.openStart) {
      last.toS = cell.toS;
      last.openEnd = cell.openEnd;
    } else joined.push({ ...cell });
  }
  return joined;
}

/**
 * Gives cells shorter than `leastS` to a neighbour, the shortest first: one lamp that lags behind the others, or a glitch, makes no cell of
 * its own. The neighbour with the same selector state (bit 0) is preferred, then the longer one.
 */
export function absorbShort(cells: readonly Cell[], leastS: number): Cell[] {
  let result = joinAlike(cells);
  for (const share of [0.25, 0.5, 0.75, 1]) {
    for (let before = Infinity; before > result.length;) {
      before = result.length;
      result = joinAlike(absorbOnce(result, share * leastS));
    }
  }
  return result;
}

function absorbOnce(cells: readonly Cell[], leastS: number): Cell[] {
  const kept: Cell[] = [];
  const waiting = cells.map((cell) => ({ ...cell }));
  waiting.forEach((cell, index) => {
    const left = kept.at(-1);
    const right = waiting[index + 1];
    const lengthS = cell.toS - cell.fromS;
    // What a hole or the file's end cut short was longer: only a sliver of it is taken for a lag.
    const isShort = lengthS < (cell.openStart || cell.openEnd ? Math.min(leastS, SLIVER_S) : leastS);
    const side = cell.hole || !isShort ? undefined : sideFor(cell, left, right);
    if (side === 'left' && left !== undefined) {
      left.toS = cell.toS;
    } else if (side === 'right' && right !== undefined) {
      right.fromS = cell.fromS;
    } else kept.push(cell);
  });
  return kept;
}

function sideFor(cell: Cell, left: Cell | undefined, right: Cell | undefined): 'left' | 'right' | undefined {
  const takesLeft = left !== undefined && !left.hole && !cell.openStart;
  const takesRight = right !== undefined && !right.hole && !cell.openEnd;
  if (!takesLeft || !takesRight) return takesLeft ? 'left' : takesRight ? 'right' : undefined;
  const likeLeft = ((left.lit ^ cell.lit) & 1) === 0;
  const likeRight = ((right.lit ^ cell.lit) & 1) === 0;
  if (likeLeft !== likeRight) return likeLeft ? 'left' : 'right';
  return left.toS - left.fromS >= right.toS - right.fromS ? 'left' : 'right';
}
