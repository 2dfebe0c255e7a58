import type { Verdict } from '../../shared/verdict.js';
import type { Style } from '../output.js';

/** A verdict's own sign. Never colour alone: sign and word stand together. */
const SIGNS: Readonly<Record<Verdict, string>> = { pass: '■', fail: '✕', inconclusive: '◧', 'not done': '_' };
const PLAIN_SIGNS: Readonly<Record<Verdict, string>> = { pass: '[=]', fail: '[x]', inconclusive: '[/]', 'not done': '[ ]' };

/** Sign and word of a verdict, in its colour; `word` stands in for the verdict's own (a rule has its name). */
export function verdictText(verdict: Verdict, { ink, unicode }: Pick<Style, 'ink' | 'unicode'>, word: string = verdict): string {
  const sign = (unicode ? SIGNS : PLAIN_SIGNS)[verdict];
  const dressed = `${sign} ${word}`;
  if (verdict === 'pass') return ink.green(dressed);
  if (verdict === 'fail') return ink.red(dressed);
  return verdict === 'inconclusive' ? ink.yellow(dressed) : dressed;
}

/** Only the sign, in its colour: for lists where the name beside it is the word. */
export function verdictSign(verdict: Verdict, { ink, unicode }: Pick<Style, 'ink' | 'unicode'>): string {
  const sign = (unicode ? SIGNS : PLAIN_SIGNS)[verdict];
  return verdict === 'pass' ? ink.green(sign) : verdict === 'fail' ? ink.red(sign) : verdict === 'inconclusive' ? ink.yellow(sign) : sign;
}
