import type { ReadingBody, UnitEvent, UnitEventOf } from '../history/events.js';
import { parseAccuracy } from '../measure/parse-accuracy.js';
import { readingUncertainty } from '../measure/uncertainty.js';
import type { Verdict } from '../verdict.js';

export type CheckEvent = UnitEventOf<'reading'> | UnitEventOf<'inspection'>;

export const isCheckEvent = (event: UnitEvent): event is CheckEvent => event.kind === 'reading' || event.kind === 'inspection';

/** What a check counts as. A pass of a test that was not followed by its discharge is not done: the test ends with it (gate 2). */
export function verdictOf(event: CheckEvent): Verdict {
  if (event.kind === 'inspection') return event.inspection.verdict;
  const { judgement, undischarged } = event.reading;
  return undischarged === true && judgement.verdict === 'pass' ? 'not done' : judgement.verdict;
}

export const checkIdOf = (event: CheckEvent): string | undefined =>
  event.kind === 'reading' ? event.reading.checkId : event.inspection.checkId;

const SEVERITY: Record<Verdict, number> = { fail: 3, inconclusive: 2, 'not done': 1, pass: 0 };

/**
 * Whether the later reading was taken with a smaller uncertainty, by meter and not by luck: both accuracies are held against the
 * larger of the two values, for a share of the reading shrinks with the reading itself.
 */
function takenMoreClosely(later: CheckEvent, earlier: CheckEvent): boolean {
  // A typed accuracy is somebody's word: until meters are registered it takes nothing back.
  if (later.kind !== 'reading' || earlier.kind !== 'reading' || later.reading.source === 'typed') return false;
  const at = Math.max(Math.abs(later.reading.judgement.value), Math.abs(earlier.reading.judgement.value));
  const spreadOf = ({ accuracy, resolution, judgement }: ReadingBody): number =>
    readingUncertainty(at, parseAccuracy(accuracy), resolution, judgement.coverageFactor).expanded;
  return spreadOf(later.reading) < spreadOf(earlier.reading);
}

/**
 * The result that stands among several of one check, oldest first, with no repair between them.
 *
 * No retesting until it passes (gate 5): a later result takes the place of an earlier one when it is no better,
 * or when it was taken with a smaller uncertainty. An inspection has no uncertainty, so a failed one stands until a repair.
 * Undefined when there is none.
 *
 * @example standingResult([fail ±0.9, pass ±0.9]) // the fail
 * @example standingResult([inconclusive ±0.14, pass ±0.04]) // the pass
 */
export function standingResult(results: readonly CheckEvent[]): CheckEvent | undefined {
  let standing: CheckEvent | undefined;
  for (const result of results) {
    if (
      !standing ||
      verdictOf(standing) === 'not done' ||
      SEVERITY[verdictOf(result)] >= SEVERITY[verdictOf(standing)] ||
      takenMoreClosely(result, standing)
    )
      standing = result;
  }
  return standing;
}
