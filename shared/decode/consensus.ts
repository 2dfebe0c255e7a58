import { logSum } from './code-posterior.js';
import type { Piece } from './phases.js';

/** A run of pieces that one code explains. */
export interface Agreement {
  /** Indexes into the pieces, both included. */
  first: number;
  last: number;
  onLit: number;
  offLit: number;
  /** The probability that such a run is there at all, and no chance pattern. */
  probability: number;
}

/** What the model takes for granted about how panels behave; natural logarithms of probabilities. */
export interface ConsensusModel {
  /** That the whole stretch is no code but other lamps blinking. */
  noCode: number;
}

/** A stretch without a ready blink may be anything: 2 %; in service mode (ready blink seen, or a code read beyond doubt): 1 in 5000. */
export const NO_CODE_UNPROVED: ConsensusModel = { noCode: Math.log(0.02) };
export const NO_CODE_IN_SERVICE_MODE: ConsensusModel = { noCode: Math.log(0.0002) };

/** The panel goes on to another code without a mark: 5 % a phase. */
const CHANGE = Math.log(0.05);
/** From code to blinking without sense, and back. */
const BREAK = Math.log(0.001);
/** A phase shows another pattern than the code's (a hand, a glitch): 3 in 10 000, any pattern alike. */
const SPOILED = Math.log(0.0003);
/** A fragment within a code, or within senseless blinking. */
const FRAGMENT_IN_CODE = -3;
const FRAGMENT_IN_NONSENSE = -0.5;
/** A new code begins with its first digit. */
const BEGINS_WITH_SECOND = -1;
/** Neighbouring phases longer or shorter than one another by more than the sheet format's 25 %, with what edges are uncertain by. */
const UNEVEN_RATIO = 1.4;
const VERY_UNEVEN_RATIO = 1.9;
const UNEVEN = -1.5;
const VERY_UNEVEN = -3;
/** Candidate codes kept; more only arise in blinking without sense. */
const MOST_CODES = 48;

interface Code {
  onLit: number;
  offLit: number;
}

/**
 * Finds which runs of pieces belong to one code each: a majority vote over the repeats (MacKay, exercise 1.3: repetition code) put as a
 * hidden Markov model. The states are the codes seen in neighbouring phases, and "no code"; the likeliest course is taken, and the
 * probability of each run comes from all courses (forwards and backwards).
 *
 * @param pieces of one stretch between ends (ready blink, darkness, mark); blanks and holes already left out
 * @param codeCount how many codes there are beforehand, each equally likely
 * @param lampCount weighted lamps: senseless blinking shows any of their patterns alike
 */
export function agree(pieces: readonly Piece[], codeCount: number, lampCount: number, model: ConsensusModel, byHand: boolean): Agreement[] {
  const codes = candidateCodes(pieces);
  const count = pieces.length;
  if (codes.length === 0 || count === 0) return [];
  const width = codes.length + 1;
  const none = codes.length;
  const choice = -Math.log(Math.max(1, codeCount));
  const emission = pieces.map((piece, index) => emissionsOf(piece, pieces[index - 1], codes, lampCount, byHand));
  const entryTo = (index: number, state: number): number => {
    if (state === none) return 0;
    return choice + (pieces[index]?.selectorLit === true ? 0 : BEGINS_WITH_SECOND);
  };
  const start = (state: number): number => (state === none ? model.noCode : entryTo(0, state));
  const best: Float64Array[] = [];
  const cameFrom: Int32Array[] = [];
  const forward: Float64Array[] = [];
  for (let index = 0; index < count; index += 1) {
    const here = new Float64Array(width);
    const from = new Int32Array(width);
    const sum = new Float64Array(width);
    const before = best[index - 1];
    const sumBefore = forward[index - 1];
    const bestCode = before === undefined ? 0 : highest(before, none);
    const sumOfCodes = sumBefore === undefined ? 0 : sumOf(sumBefore, none);
    for (let state = 0; state < width; state += 1) {
      const emitted = (emission[index] as Float64Array)[state] as number;
      if (before === undefined || sumBefore === undefined) {
        here[state] = start(state) + emitted;
        sum[state] = start(state) + emitted;
        continue;
      }
      // To stay costs nothing; to come from another code costs more than to stay, so that the code itself may stand among the others.
      const step = (state === none ? BREAK : CHANGE) + entryTo(index, state);
      const breakStep = BREAK + entryTo(index, state);
      from[state] = state;
      let value = before[state] as number;
      if ((before[bestCode] as number) + step > value) {
        from[state] = bestCode;
        value = (before[bestCode] as number) + step;
      }
      if (state !== none && (before[none] as number) + breakStep > value) {
        from[state] = none;
        value = (before[none] as number) + breakStep;
      }
      here[state] = value + emitted;
      let total = logSum(sumBefore[state] as number, sumOfCodes + step);
      if (state !== none) total = logSum(total, (sumBefore[none] as number) + breakStep);
      sum[state] = total + emitted;
    }
    best.push(here);
    cameFrom.push(from);
    forward.push(sum);
  }
  const backward: Float64Array[] = Array.from({ length: count }, () => new Float64Array(width));
  for (let index = count - 2; index >= 0; index -= 1) {
    const next = (emission[index + 1] as Float64Array).map(
      (emitted, state) => emitted + ((backward[index + 1] as Float64Array)[state] as number),
    );
    const entered = next.map((value, state) => value + entryTo(index + 1, state));
    const anyCode = sumOf(entered, none);
    const here = backward[index] as Float64Array;
    for (let state = 0; state < none; state += 1) {
      here[state] = logSum(logSum(next[state] as number, anyCode + CHANGE), (next[none] as number) + BREAK);
    }
    here[none] = logSum(next[none] as number, anyCode + BREAK);
  }
  const everything = (forward[count - 1] as Float64Array).reduce((sum, value) => logSum(sum, value), -Infinity);

  const path = new Int32Array(count);
  const last = best[count - 1] as Float64Array;
  path[count - 1] = last.reduce((most, value, state) => (value > (last[most] as number) ? state : most), 0);
  for (let index = count - 1; index > 0; index -= 1) path[index - 1] = (cameFrom[index] as Int32Array)[path[index] as number] as number;

  const agreements: Agreement[] = [];
  for (let index = 0; index < count;) {
    const state = path[index] as number;
    let end = index;
    let probability = 0;
    for (; end < count && path[end] === state; end += 1) {
      const log = ((forward[end] as Float64Array)[state] as number) + ((backward[end] as Float64Array)[state] as number) - everything;
      probability = Math.max(probability, Math.min(1, Math.exp(log)));
    }
    const code = codes[state];
    if (code !== undefined) agreements.push({ first: index, last: end - 1, ...code, probability });
    index = end;
  }
  return agreements;
}

/** The index of the largest of the first `count` values. */
function highest(values: Float64Array, count: number): number {
  let most = 0;
  for (let index = 1; index < count; index += 1) if ((values[index] as number) > (values[most] as number)) most = index;
  return most;
}

function sumOf(values: Float64Array, count: number): number {
  let sum = -Infinity;
  for (let index = 0; index < count; index += 1) sum = logSum(sum, values[index] as number);
  return sum;
}

function candidateCodes(pieces: readonly Piece[]): Code[] {
  const counts = new Map<string, { code: Code; count: number }>();
  const tells = pieces.filter((piece) => piece.kind === 'phase' || piece.kind === 'cut');
  tells.forEach((piece, index) => {
    for (const other of [tells[index + 1], tells[index + 3]]) {
      if (other === undefined || other.selectorLit === piece.selectorLit) continue;
      const [on, off] = piece.selectorLit ? [piece, other] : [other, piece];
      const key = `${on.lit}/${off.lit}`;
      const entry = counts.get(key) ?? { code: { onLit: on.lit, offLit: off.lit }, count: 0 };
      entry.count += 1;
      counts.set(key, entry);
    }
  });
  return [...counts.values()]
    .sort((a, b) => b.count - a.count)
    .slice(0, MOST_CODES)
    .map(({ code }) => code);
}

function emissionsOf(piece: Piece, before: Piece | undefined, codes: readonly Code[], lampCount: number, byHand: boolean): Float64Array {
  const values = new Float64Array(codes.length + 1);
  const anyPattern = -lampCount * Math.LN2;
  if (piece.kind !== 'phase' && piece.kind !== 'cut' && piece.kind !== 'tail') {
    values.fill(FRAGMENT_IN_CODE);
    values[codes.length] = FRAGMENT_IN_NONSENSE;
    return values;
  }
  if (piece.kind === 'tail') {
    codes.forEach((code, index) => (values[index] = code.offLit === 0 && before?.selectorLit === true ? 0 : anyPattern));
    values[codes.length] = anyPattern;
    return values;
  }
  const uneven = byHand ? 0 : unevenness(piece, before);
  codes.forEach((code, index) => {
    values[index] = Math.max(-mismatch(piece, code), SPOILED + anyPattern) + uneven;
  });
  values[codes.length] = anyPattern;
  return values;
}

/** How much evidence speaks against a piece showing the code, nats. */
export function mismatch(piece: Piece, code: Code): number {
  const lit = piece.selectorLit ? code.onLit : code.offLit;
  return piece.evidence.reduce((sum, nats, lamp) => sum + Math.max(0, ((lit >> lamp) & 1) === 1 ? -nats : nats), 0);
}

function unevenness(piece: Piece, before: Piece | undefined): number {
  if (before === undefined || piece.kind !== 'phase' || before.kind !== 'phase') return 0;
  const ratio = (piece.toS - piece.fromS) / (before.toS - before.fromS);
  const factor = Math.max(ratio, 1 / ratio);
  return factor > VERY_UNEVEN_RATIO ? VERY_UNEVEN : factor > UNEVEN_RATIO ? UNEVEN : 0;
}
