import type { DecodeAnswer } from '../decode/answer.js';
import type { UnitEventOf } from '../history/events.js';
import type { Sheet } from '../sheet/schema.js';
import type { Verdict } from '../verdict.js';
import { countingEvents, sinceOpened, type UnitFacts } from './facts.js';

export interface NoCodeJudgement {
  verdict: Verdict;
  reason: string;
}

/**
 * Gate 4, "no code" must be proved: what one capture says about it.
 *
 * Pass: a ready blink with every lamp of it lit, nothing unreadable, at least `sheet.noCodeS` long, and no code.
 * Fail: a code was read. Everything else is inconclusive.
 *
 * @example judgeNoCode(answerOfReadyBlinkOnly, heron) // { verdict: 'pass', reason: 'ready blink only, 25 s' }
 */
export function judgeNoCode(answer: DecodeAnswer, sheet: Sheet): NoCodeJudgement {
  const seconds = `${Math.floor(answer.durationS)} s`;
  if (answer.codes.length > 0)
    return { verdict: 'fail', reason: `shows ${[...new Set(answer.codes.map((code) => code.code))].join(', ')}` };
  if (answer.segments.some((segment) => segment.kind === 'unreadable'))
    return { verdict: 'inconclusive', reason: 'a stretch of it is unreadable' };
  if (!answer.segments.some((segment) => segment.kind === 'ready')) return { verdict: 'inconclusive', reason: 'no ready blink in it' };
  if (answer.deadLamps.length > 0) return { verdict: 'inconclusive', reason: `${answer.deadLamps.join(', ')} does not light` };
  if (answer.durationS < sheet.noCodeS)
    return { verdict: 'inconclusive', reason: `${seconds} long, the sheet asks for ${sheet.noCodeS} s` };
  return { verdict: 'pass', reason: `ready blink only, ${seconds}` };
}

/**
 * Whether it is proved that the unit shows no code: judged over every capture since the last repair.
 *
 * After a repair the stored codes are cleared by the sheet's procedure first; captures from before the first clearing show
 * what was stored and are kept, but the proof begins after it. A second clearing forgives nothing. Of the captures of the proof a
 * code stands as a fail whatever comes later; an inconclusive one is replaced only by a later proof at least as long
 * (it saw everything that the first one could not).
 */
export function noCodeProof(facts: UnitFacts): NoCodeJudgement {
  const { sheet } = facts;
  if (!sheet) return { verdict: 'not done', reason: 'no service sheet for this unit' };
  const events = sinceOpened(countingEvents(facts));
  const lastRepair = events.findLastIndex((event) => event.kind === 'repair');
  let proof = events.slice(lastRepair + 1);
  if (lastRepair >= 0 && sheet.procedures.some((procedure) => procedure.id === CLEAR_CODES)) {
    const cleared = proof.findIndex((event) => event.kind === 'codes cleared');
    if (cleared < 0) return { verdict: 'not done', reason: 'stored codes were not cleared after the repair' };
    proof = proof.slice(cleared + 1);
  }
  const captures = proof.filter((event): event is UnitEventOf<'capture'> => event.kind === 'capture');
  let standing: (NoCodeJudgement & { durationS: number }) | undefined;
  for (const { capture } of captures) {
    const judged = { ...judgeNoCode(capture.answer, sheet), durationS: capture.answer.durationS };
    if (
      !standing ||
      judged.verdict === 'fail' ||
      standing.verdict === 'pass' ||
      (standing.verdict === 'inconclusive' && judged.verdict === 'pass' && judged.durationS >= standing.durationS)
    ) {
      if (standing?.verdict !== 'fail') standing = judged;
    }
  }
  return standing
    ? { verdict: standing.verdict, reason: standing.reason }
    : { verdict: 'not done', reason: 'no capture since the last repair' };
}

/** The id of the procedure in a service sheet that clears stored codes. */
export const CLEAR_CODES = 'clear-codes';
