import type { WeightedPhases } from '../sheet/schema.js';
import type { LampState } from './simulate-lamps.js';

/**
 * The ready blink as states: the lamps lit together and dark together, `times` times, ending dark.
 *
 * @example readyBlinkStates(['fill', 'spin'], 2, 0.9) // lit, dark, lit, dark, 0.45 s each
 */
export function readyBlinkStates(lamps: readonly string[], times: number, periodS: number, alsoLit: readonly string[] = []): LampState[] {
  return Array.from({ length: times }, () => [
    { seconds: periodS / 2, lit: [...lamps, ...alsoLit] },
    { seconds: periodS / 2, lit: [...alsoLit] },
  ]).flat();
}

/**
 * A code as states: selector and first digit, then the second digit, over and over. One length a phase, in order; as many phases as lengths.
 * Refuses (RangeError) a digit that the weights can't show.
 *
 * @example codeStates(heron, 5, 3, [1.2, 1.2]) // [{ seconds: 1.2, lit: ['spin', 'rinse', 'fill'] }, { seconds: 1.2, lit: ['wash', 'fill'] }]
 */
export function codeStates(
  coding: Pick<WeightedPhases, 'selector' | 'weights'>,
  onDigit: number,
  offDigit: number,
  phasesS: readonly number[],
  alsoLit: readonly string[] = [],
): LampState[] {
  const on = [coding.selector, ...lampsOfDigit(coding, onDigit), ...alsoLit];
  const off = [...lampsOfDigit(coding, offDigit), ...alsoLit];
  return phasesS.map((seconds, phase) => ({ seconds, lit: phase % 2 === 0 ? on : off }));
}

/** The lamps whose weights add up to a digit, the heaviest first. */
export function lampsOfDigit(coding: Pick<WeightedPhases, 'weights'>, digit: number): string[] {
  const entries = Object.entries(coding.weights).sort((a, b) => b[1] - a[1]);
  const search = (rest: number, from: number): string[] | undefined => {
    if (rest === 0) return [];
    for (let index = from; index < entries.length; index += 1) {
      const [id, weight] = entries[index] as [string, number];
      const others = weight <= rest ? search(rest - weight, index + 1) : undefined;
      if (others !== undefined) return [id, ...others];
    }
    return undefined;
  };
  const lamps = search(digit, 0);
  if (lamps === undefined) throw new RangeError(`no lamps of this coding add up to ${digit}`);
  return lamps;
}
