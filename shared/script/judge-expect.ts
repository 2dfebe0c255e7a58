import type { DecodeAnswer } from '../decode/answer.js';
import { judgeNoCode } from '../readiness/no-code.js';
import type { Sheet } from '../sheet/schema.js';
import type { Verdict } from '../verdict.js';
import { ANY_CODE, NO_CODE } from './schema.js';

/**
 * Judges what a capture shows against what a script expects of it.
 *
 * `none` is gate 4 (no code, proved). `any`, or one code, passes when it was read; fails when the capture reads well and shows
 * something else; and is inconclusive when a stretch of it is unreadable or nothing was shown at all.
 *
 * @example judgeExpectation('G5K3', answer, heron) // { verdict: 'pass', seen: 'G5K3' }
 */
export function judgeExpectation(expected: string, answer: DecodeAnswer, sheet: Sheet): { verdict: Verdict; seen: string } {
  if (expected === NO_CODE) {
    const { verdict, reason } = judgeNoCode(answer, sheet);
    return { verdict, seen: reason };
  }
  const codes = answer.codes.map(({ code }) => code);
  const seen = codes.length > 0 ? [...new Set(codes)].join(', ') : 'no code';
  if (expected === ANY_CODE ? codes.length > 0 : codes.includes(expected)) return { verdict: 'pass', seen };
  const unreadable = answer.segments.some((segment) => segment.kind === 'unreadable');
  return { verdict: codes.length > 0 && !unreadable ? 'fail' : 'inconclusive', seen: unreadable ? `${seen}, a stretch unreadable` : seen };
}
