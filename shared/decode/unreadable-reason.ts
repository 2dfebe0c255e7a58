import type { WeightedPhases } from '../sheet/schema.js';
import { litSum, type CodeCandidate } from './code-posterior.js';
import type { Piece } from './phases.js';
import { usualLength, type CodeStretch } from './stretches.js';

/** What a technician needs to know about the lamps to act on an unreadable stretch. */
export interface LampKnowledge {
  id: string;
  dead: boolean;
  everLit: boolean;
  unclear: boolean;
  steadyDoubt: number;
}

const seconds = (value: number): string => `${value.toFixed(2)} s`;

/** "lamp 'drain' is", "lamps 'rinse' and 'drain' are". */
function subject(lamps: readonly LampKnowledge[], one: string, many: string): string {
  const names = lamps.map((lamp) => `'${lamp.id}'`).join(' and ');
  return lamps.length === 1 ? `lamp ${names} ${one}` : `lamps ${names} ${many}`;
}

function weak(lamps: readonly LampKnowledge[]): string {
  return `${subject(lamps, 'is', 'are')} too weak for the noise: move the sensor closer, shade it, and capture again`;
}

/** Why nothing in a stretch reads as a code at all. */
export function reasonForNonsense(pieces: readonly Piece[], coding: WeightedPhases, selector: LampKnowledge): string {
  const [leastS, mostS] = coding.phaseS;
  if (selector.dead) return `the selector lamp '${selector.id}' is burnt out (dark in the ready blink): replace it and capture again`;
  if (!selector.everLit)
    return `the selector lamp '${selector.id}' was never seen lit: no code is shown, or the lamp is burnt out; capture the ready blink too`;
  const lengths = selectorRuns(pieces);
  const usualS = usualLength(lengths);
  if (lengths.length < 2) {
    return `the selector lamp '${selector.id}' does not take turns here: these are no service-mode lamps, or the capture is too short`;
  }
  if (usualS < leastS) return `phases change faster than the sheet allows: ${seconds(usualS)}, the sheet says ${leastS} to ${mostS} s`;
  if (usualS > mostS) return `phases last longer than the sheet allows: ${seconds(usualS)}, the sheet says ${leastS} to ${mostS} s`;
  return 'the lamps show no code that repeats: check that service mode is on, shade the probe, and capture again';
}

/** Why a code that was seen is not sure enough to be stated. */
export function reasonForDoubt(
  stretch: CodeStretch,
  coding: WeightedPhases,
  lamps: readonly LampKnowledge[],
  candidates: readonly CodeCandidate[],
  repeats: number,
): string {
  const weights = Object.values(coding.weights);
  const likeliest = candidates[0];
  const sums = [litSum(weights, stretch.onLit), litSum(weights, stretch.offLit)] as const;
  const dead = lamps.filter((lamp) => lamp.dead);
  const validAlready = sums.every((sum) => sum <= coding.maxDigit);
  if (!validAlready) {
    const which = sums[0] > coding.maxDigit ? 'lit' : 'dark';
    const sum = sums[0] > coding.maxDigit ? sums[0] : sums[1];
    return `the lamps add up to ${sum} while the selector is ${which}: more than the largest digit ${coding.maxDigit}`;
  }
  const unclear = lamps.filter((lamp) => lamp.unclear);
  if (unclear.length > 0) return weak(unclear);
  if (repeats === 0) return 'the code was not seen whole: capture for at least two full turns of the selector';
  if (dead.length > 0 && candidates.length > 1 && (likeliest?.probability ?? 0) < 0.9) {
    return `${subject(dead, 'is', 'are')} burnt out and could change the code: replace ${dead.length === 1 ? 'it' : 'them'} and capture again`;
  }
  const steady = lamps.find((lamp) => lamp.steadyDoubt > 1e-4);
  if (steady !== undefined)
    return `lamp '${steady.id}' never changed: its light can't be told from ambient light; capture the ready blink too, or shade the probe`;
  const unproved = lamps.filter((lamp) => !lamp.everLit && !lamp.dead);
  if (unproved.length > 0 && candidates.length > 1) {
    return `${subject(unproved, 'was', 'were')} never seen lit and could change the code if burnt out: capture the ready blink too`;
  }
  return 'the code was seen too seldom, or too unclearly, to be sure: capture it for longer, and shade the probe';
}

function selectorRuns(pieces: readonly Piece[]): Piece[] {
  const runs: Piece[] = [];
  for (const piece of pieces) {
    if (piece.kind === 'hole') continue;
    const last = runs.at(-1);
    if (last !== undefined && last.selectorLit === piece.selectorLit) last.toS = piece.toS;
    else runs.push({ ...piece });
  }
  // The first and the last may be cut by the stretch's ends.
  return runs.length > 3 ? runs.slice(1, -1) : runs;
}
