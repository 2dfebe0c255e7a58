import type { Band } from '../sheet/schema.js';
import { absorbShort, type Cell } from './cells.js';

/** A stretch in which the ready lamps blink together. */
export interface ReadyStretch {
  fromS: number;
  toS: number;
  /** Bit k: the k-th ready lamp took part. */
  lit: number;
  blinks: number;
}

/** Lamps that may be missing from the blink because they are burnt out (contract, section 3: "all but one or two"). */
const MOST_MISSING = 2;
const FEWEST_BLINKS = 2;
/** With lamps missing, a hand's shadow over a code may look like two blinks. */
const FEWEST_BLINKS_WITH_MISSING = 3;
/** Periods are measured to within two edges of a few bins each; a hand taps less evenly. */
const PERIOD_SLACK_S = 0.06;
const PERIOD_SLACK_BY_HAND_S = 0.25;
/** Each half of a blink lasts at least this share of the shortest period. */
const LEAST_HALF_SHARE = 0.2;

/**
 * Finds the ready blink: all ready lamps, or all but one or two, lit together and dark together, again and again, with a period inside the
 * sheet's band. At least two blinks in a row, three with lamps missing; the same lamps each time.
 *
 * @param cells cut by the ready lamps' changes; bit k of `lit` is the k-th ready lamp
 * @returns the stretches in time order, from the first rise to the last fall
 */
export function findReadyBlinks(cells: readonly Cell[], lampCount: number, periodS: Band, byHand: boolean): ReadyStretch[] {
  const slackS = byHand ? PERIOD_SLACK_BY_HAND_S : PERIOD_SLACK_S;
  const [leastS, mostS] = [periodS[0] - slackS, periodS[1] + slackS];
  const leastHalfS = LEAST_HALF_SHARE * periodS[0];
  const fewestLit = Math.max(1, lampCount - MOST_MISSING, Math.ceil(lampCount / 2));
  const clean = absorbShort(cells, Math.min(leastHalfS, 0.12));
  const stretches: ReadyStretch[] = [];
  let chain: Cell[] = [];
  const finish = (): void => {
    const first = chain[0];
    const last = chain.at(-1);
    const fewest = first !== undefined && bitCount(first.lit) < lampCount ? FEWEST_BLINKS_WITH_MISSING : FEWEST_BLINKS;
    if (chain.length >= fewest && first !== undefined && last !== undefined) {
      stretches.push({ fromS: first.fromS, toS: last.toS, lit: first.lit, blinks: chain.length });
    }
    chain = [];
  };
  clean.forEach((cell, index) => {
    const lengthS = cell.toS - cell.fromS;
    if (cell.hole) return finish();
    if (cell.lit === 0) {
      if (lengthS > mostS - leastHalfS || (lengthS < leastHalfS && !cell.openEnd)) finish();
      return;
    }
    const open = cell.openStart || cell.openEnd;
    const inUnison = bitCount(cell.lit) >= fewestLit && lengthS <= mostS - leastHalfS && (open || lengthS >= leastHalfS);
    if (!inUnison) return finish();
    const before = chain.at(-1);
    if (before !== undefined) {
      // A cell right beside the last one (no dark half between) is another pattern, and so is another set of lamps.
      const periodHereS = before.openStart ? cell.toS - before.toS : cell.fromS - before.fromS;
      const follows = clean[index - 1]?.lit === 0 && cell.lit === before.lit;
      const inBand = periodHereS <= mostS && (periodHereS >= leastS || (cell.openEnd && before.openStart));
      if (!follows || !inBand) finish();
    }
    chain.push(cell);
  });
  finish();
  return stretches;
}

function bitCount(bits: number): number {
  let count = 0;
  for (let rest = bits; rest !== 0; rest &= rest - 1) count += 1;
  return count;
}
