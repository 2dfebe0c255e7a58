import { unitNumber } from '../../lib/format.js';

/** So many units more can be printed at once. */
export const MOST_BESIDE = 40;

/** The units that somebody typed, each once and without the one that is printed anyway; what is above the limit stands apart. */
export function unitsBeside(text: string, unit: number): { numbers: number[]; tooMany: number[] } {
  const typed = [...text.matchAll(/\d{1,9}/g)].map(([digits]) => Number(digits));
  const asked = [...new Set(typed)].filter((number) => number > 0 && number !== unit);
  return { numbers: asked.slice(0, MOST_BESIDE), tooMany: asked.slice(MOST_BESIDE) };
}

export const named = (numbers: readonly number[]): string => numbers.map((number) => `No. ${unitNumber(number)}`).join(', ');

/** Which units are not printed along and why, in words; undefined where all are. */
export function leftOutWords({
  tooMany,
  without,
  unfetched,
  why = '',
}: {
  tooMany: readonly number[];
  without: readonly number[];
  unfetched: readonly number[];
  why?: string | undefined;
}): string | undefined {
  const words = [
    ...(tooMany.length > 0 ? [`At most ${MOST_BESIDE} more at once, so left out: ${named(tooMany)}. Print them in another go.`] : []),
    ...(without.length > 0 ? [`No standing tag, so left out: ${named(without)}.`] : []),
    ...(unfetched.length > 0 ? [`Could not be fetched, so left out: ${named(unfetched)}. ${why}`.trimEnd()] : []),
  ];
  return words.length === 0 ? undefined : words.join(' ');
}
