import type { WeightedPhases } from '../sheet/schema.js';
import { codeText } from './code-text.js';

/** What is known of one weighted lamp besides its evidence. */
export interface LampTrust {
  /** The probability that it is burnt out and shows dark whatever the panel means. */
  burntOut: number;
  /** The probability that lit and dark were taken for one another all the time. */
  swapped: number;
}

export interface CodeCandidate {
  code: string;
  onDigit: number;
  offDigit: number;
  probability: number;
}

/** The chance that the lamps show something that is no valid code at all, and yet looks like phases. */
const NO_CODE_PRIOR = 1e-4;
/** Patterns this much less likely than the best one, nats, are left out of the sum. */
const NEGLIGIBLE_NATS = 25;

/**
 * The probability of every code, given the evidence for each weighted lamp over all phases with the selector lit and all with it dark.
 *
 * Bayes with each valid digit equally likely beforehand; a lamp may be burnt out (then its bit is unknown in both digits) or taken for the
 * opposite of what it is, with the probabilities given. What is left to 1 is the chance that no valid code was shown.
 *
 * @param onEvidence log-likelihood ratio of lit against dark, nats, one a weighted lamp in the order of `coding.weights`
 * @returns the likeliest first; probabilities below 10^-9 are left out
 */
export function codePosterior(
  coding: WeightedPhases,
  onEvidence: readonly number[],
  offEvidence: readonly number[],
  trust: readonly LampTrust[],
): CodeCandidate[] {
  const weights = Object.values(coding.weights);
  const patterns = digitPatterns(weights, coding.maxDigit);
  const on = worthwhile(patterns, onEvidence, trust);
  const off = worthwhile(patterns, offEvidence, trust);
  const digitCount = new Set(patterns.map((pattern) => pattern.digit)).size;
  const found = new Map<string, CodeCandidate & { log: number }>();
  for (const first of on) {
    for (const second of off) {
      let log = Math.log(1 - NO_CODE_PRIOR) - 2 * Math.log(digitCount) - Math.log(first.ways * second.ways);
      weights.forEach((_, lamp) => {
        log += lampLikelihood(first.lit >> lamp, second.lit >> lamp, onEvidence[lamp] ?? 0, offEvidence[lamp] ?? 0, trust[lamp]);
      });
      const code = codeText(coding, first.digit, second.digit);
      const before = found.get(code);
      if (before === undefined) found.set(code, { code, onDigit: first.digit, offDigit: second.digit, probability: 0, log });
      else before.log = logSum(before.log, log);
    }
  }
  const none = [...onEvidence, ...offEvidence].reduce(
    (sum, nats) => sum + Math.abs(nats) / 2,
    Math.log(NO_CODE_PRIOR) - 2 * weights.length * Math.LN2,
  );
  const candidates = [...found.values()];
  const total = candidates.reduce((sum, candidate) => logSum(sum, candidate.log), none);
  return candidates
    .map(({ log, ...candidate }) => ({ ...candidate, probability: Math.exp(log - total) }))
    .filter((candidate) => candidate.probability > 1e-9)
    .sort((a, b) => b.probability - a.probability || a.onDigit - b.onDigit || a.offDigit - b.offDigit);
}

interface DigitPattern {
  lit: number;
  digit: number;
  /** How many patterns show this digit: they share its prior. */
  ways: number;
}

/** Every pattern of lamps that adds up to a digit of the sheet. For weights 1, 2, 4, 8 and 9 as the largest: binary-coded decimal, 8-4-2-1. */
export function digitPatterns(weights: readonly number[], maxDigit: number): DigitPattern[] {
  const patterns: DigitPattern[] = [];
  for (let lit = 0; lit < 1 << weights.length; lit += 1) {
    const digit = litSum(weights, lit);
    if (digit <= maxDigit) patterns.push({ lit, digit, ways: 1 });
  }
  const ways = new Map<number, number>();
  for (const { digit } of patterns) ways.set(digit, (ways.get(digit) ?? 0) + 1);
  return patterns.map((pattern) => ({ ...pattern, ways: ways.get(pattern.digit) ?? 1 }));
}

/** The sum of the lit lamps' weights: selector lit with 4 and 1 reads 5. */
export function litSum(weights: readonly number[], lit: number): number {
  return weights.reduce((sum, weight, lamp) => sum + (((lit >> lamp) & 1) === 1 ? weight : 0), 0);
}

function worthwhile(patterns: readonly DigitPattern[], evidence: readonly number[], trust: readonly LampTrust[]): DigitPattern[] {
  const scored = patterns.map((pattern) => {
    let log = 0;
    evidence.forEach((nats, lamp) => {
      const plain = ((pattern.lit >> lamp) & 1) === 1 ? nats / 2 : -nats / 2;
      const { burntOut = 0, swapped = 0 } = trust[lamp] ?? {};
      log += Math.max(
        plain,
        burntOut > 0 ? -nats / 2 + Math.log(burntOut) : -Infinity,
        swapped > 0 ? -plain + Math.log(swapped) : -Infinity,
      );
    });
    return { pattern, log };
  });
  const best = Math.max(...scored.map(({ log }) => log));
  return scored.filter(({ log }) => log > best - NEGLIGIBLE_NATS).map(({ pattern }) => pattern);
}

function lampLikelihood(onBit: number, offBit: number, onNats: number, offNats: number, trust: LampTrust | undefined): number {
  const { burntOut = 0, swapped = 0 } = trust ?? {};
  const onSign = (onBit & 1) === 1 ? 0.5 : -0.5;
  const offSign = (offBit & 1) === 1 ? 0.5 : -0.5;
  const plain = onSign * onNats + offSign * offNats;
  let log = Math.log(Math.max(1e-300, 1 - burntOut - swapped)) + plain;
  if (burntOut > 0) log = logSum(log, Math.log(burntOut) - (onNats + offNats) / 2);
  if (swapped > 0) log = logSum(log, Math.log(swapped) - plain);
  return log;
}

/** log(e^a + e^b) without overflow. */
export function logSum(a: number, b: number): number {
  const high = Math.max(a, b);
  return high === -Infinity ? high : high + Math.log1p(Math.exp(Math.min(a, b) - high));
}
