import type { DecodeAnswer } from '../decode/answer.js';
import type { Sheet } from '../sheet/schema.js';
import type { Verdict } from '../verdict.js';
import { countingEvents, isMend, sinceOpened, type UnitFacts } from './facts.js';

export interface NoCodeJudgement {
  verdict: Verdict;
  reason: string;
  /** How long the lamps were watched, seconds. */
  durationS: number;
}

/** From this share of a capture on the ready blink fills it: reaction time at both ends is left out. */
const MOSTLY = 0.8;

/**
 * Gate 4, "no code" must be proved: what one capture says about it.
 *
 * Pass: a ready blink with every lamp of it lit, nothing unreadable, at least `sheet.noCodeS` long, and no code.
 * Fail: a code was read. Everything else is inconclusive.
 *
 * @example judgeNoCode(answerOfReadyBlinkOnly, heron) // { verdict: 'pass', reason: 'ready blink only, 25 s', durationS: 25 }
 */
export function judgeNoCode(answer: DecodeAnswer, sheet: Sheet): NoCodeJudgement {
  const { durationS } = answer;
  const seconds = `${Math.floor(durationS)} s`;
  const judged = (verdict: Verdict, reason: string): NoCodeJudgement => ({ verdict, reason, durationS });
  if (answer.codes.length > 0) return judged('fail', `shows ${[...new Set(answer.codes.map((code) => code.code))].join(', ')}`);
  if (answer.segments.some((segment) => segment.kind === 'unreadable')) return judged('inconclusive', 'a stretch of it is unreadable');
  if (!answer.segments.some((segment) => segment.kind === 'ready')) return judged('inconclusive', 'no ready blink in it');
  if (answer.deadLamps.length > 0) return judged('inconclusive', `${answer.deadLamps.join(', ')} does not light`);
  if (durationS < sheet.noCodeS) return judged('inconclusive', `${seconds} long, the sheet asks for ${sheet.noCodeS} s`);
  const readySeconds = answer.segments.reduce((sum, segment) => sum + (segment.kind === 'ready' ? segment.toS - segment.fromS : 0), 0);
  // The gate asks for the capture's length; a panel that blinked for a moment and then went dark is told as it was.
  return judged(
    'pass',
    readySeconds >= durationS * MOSTLY
      ? `ready blink only, ${seconds}`
      : `ready blink for ${Math.floor(readySeconds)} s and no code, ${seconds} watched`,
  );
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
  const notDone = (reason: string): NoCodeJudgement => ({ verdict: 'not done', reason, durationS: 0 });
  if (!sheet) return notDone('no service sheet for this unit');
  const events = sinceOpened(countingEvents(facts));
  const lastRepair = events.findLastIndex(isMend);
  let proof = events.slice(lastRepair + 1);
  if (lastRepair >= 0 && sheet.procedures.some((procedure) => procedure.id === CLEAR_CODES)) {
    const cleared = proof.findIndex((event) => event.kind === 'codes cleared');
    if (cleared < 0) return notDone('stored codes were not cleared after the repair');
    proof = proof.slice(cleared + 1);
  }
  const judged = proof.filter((event) => event.kind === 'capture').map(({ capture }) => judgeNoCode(capture.answer, sheet));
  const code = judged.find(({ verdict }) => verdict === 'fail');
  if (code) return code;
  return (
    judged.reduce<NoCodeJudgement | undefined>(replaced, undefined) ??
    notDone(lastRepair >= 0 ? 'no capture since the last repair' : 'no capture yet')
  );
}

/** Of two captures without a code the later one stands, unless the earlier one was inconclusive and longer. */
const replaced = (standing: NoCodeJudgement | undefined, later: NoCodeJudgement): NoCodeJudgement =>
  standing?.verdict === 'inconclusive' && standing.durationS > later.durationS ? standing : later;

/** The id of the procedure in a service sheet that clears stored codes. */
export const CLEAR_CODES = 'clear-codes';
