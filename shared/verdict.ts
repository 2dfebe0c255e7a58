import { z } from 'zod';

/** What a check or a run came to. `not done` is what a skipped step is: never a pass. */
export const verdictSchema = z.enum(['pass', 'fail', 'inconclusive', 'not done']);
export type Verdict = z.infer<typeof verdictSchema>;

/** Worst first: a run is as good as its worst step. */
const WORST_FIRST: readonly Verdict[] = ['fail', 'inconclusive', 'not done', 'pass'];

/**
 * The verdict of several verdicts together: the worst of fail, inconclusive, not done, pass.
 *
 * Assumes that only judged things are handed in (a caution or a note has no verdict). Nothing judged is
 * inconclusive: a run that looked at nothing proves nothing.
 *
 * @example worstVerdict(['pass', 'not done']) // 'not done'
 * @example worstVerdict([]) // 'inconclusive'
 */
export function worstVerdict(verdicts: readonly Verdict[]): Verdict {
  return WORST_FIRST.find((verdict) => verdicts.includes(verdict)) ?? 'inconclusive';
}
