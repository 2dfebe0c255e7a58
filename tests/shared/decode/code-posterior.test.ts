import { describe, expect, test } from 'vitest';
import { codePosterior, digitPatterns, litSum } from '../../../shared/decode/code-posterior.js';
import { heronCoding } from '../../helpers/fixtures.js';

const SURE = 60;
/** Evidence for a digit: +nats for a lit lamp, -nats for a dark one; fill 1, wash 2, rinse 4, drain 8. */
const evidenceFor = (digit: number, nats = SURE): number[] => [1, 2, 4, 8].map((weight) => ((digit & weight) !== 0 ? nats : -nats));
const TRUSTED = [0, 1, 2, 3].map(() => ({ burntOut: 0, swapped: 0 }));
const distrust = (lamp: number, burntOut: number): typeof TRUSTED =>
  TRUSTED.map((trust, index) => (index === lamp ? { burntOut, swapped: 0 } : trust));

describe('digits of weighted lamps', () => {
  // Binary-coded decimal 8-4-2-1: digits 0000 to 1001, the six patterns 1010 to 1111 are invalid
  // (fliphtml5 Digital_Logic_Design p. 42, wikibooks; as collected in the published check values, topic 8).
  test('When the weights are 8-4-2-1, then the patterns are those of binary-coded decimal', () => {
    const patterns = digitPatterns([1, 2, 4, 8], 9);
    expect(patterns.map(({ lit, digit }) => [lit.toString(2).padStart(4, '0'), digit])).toEqual([
      ['0000', 0], ['0001', 1], ['0010', 2], ['0011', 3], ['0100', 4], ['0101', 5], ['0110', 6], ['0111', 7], ['1000', 8], ['1001', 9],
    ]); // prettier-ignore
    expect(patterns.every(({ ways }) => ways === 1)).toBe(true);
  });

  // 85 -> 1000 0101, 43 -> 0100 0011, 345 -> 0011 0100 0101: same source.
  test.each([
    ['1000', 8],
    ['0101', 5],
    ['0100', 4],
    ['0011', 3],
  ])('When %s is lit, then the sum is %i', (bits, digit) => {
    expect(litSum([1, 2, 4, 8], Number.parseInt(bits, 2))).toBe(digit);
  });

  // Common practice, no published source: selector lit with 4 and 1 reads 5, dark with 2 and 1 reads 3.
  test('When 4 and 1 are lit with the selector and 2 and 1 without it, then the code is G5K3', () => {
    expect(codePosterior(heronCoding, evidenceFor(4 + 1), evidenceFor(2 + 1), TRUSTED)[0]).toMatchObject({
      code: 'G5K3',
      onDigit: 5,
      offDigit: 3,
    });
  });

  test('When two sets of lamps make the same digit, then they share its chance', () => {
    expect(digitPatterns([1, 2, 3], 3).filter(({ digit }) => digit === 3)).toEqual([
      { lit: 0b011, digit: 3, ways: 2 },
      { lit: 0b100, digit: 3, ways: 2 },
    ]);
  });
});

describe('the probability of a code', () => {
  test('When every lamp is sure, then all but the chance of no code at all is the code', () => {
    const [likeliest, next] = codePosterior(heronCoding, evidenceFor(5), evidenceFor(3), TRUSTED);
    // Computed: prior of senseless patterns 1e-4 spread over 16², against 1 in 100 codes.
    expect(likeliest?.probability).toBeCloseTo(1 / (1 + (1e-4 / 256) * 100), 6);
    expect(next).toBeUndefined();
  });

  test('When one lamp says nothing, then both codes it could make are equally likely', () => {
    const unsure = evidenceFor(1);
    unsure[1] = 0;
    const candidates = codePosterior(heronCoding, unsure, evidenceFor(4), TRUSTED);
    expect(candidates.slice(0, 2).map(({ code }) => code)).toEqual(['G1K4', 'G3K4']);
    expect(candidates[0]?.probability).toBeCloseTo(candidates[1]?.probability ?? 0, 9);
  });

  test('When a lamp is burnt out and 1 could be 9 in both digits, then four codes are equally likely', () => {
    const candidates = codePosterior(heronCoding, evidenceFor(1), evidenceFor(1), distrust(3, 1));
    expect(candidates.map(({ code }) => code)).toEqual(['G1K1', 'G1K9', 'G9K1', 'G9K9']);
    for (const { probability } of candidates) expect(probability).toBeCloseTo(0.25, 4);
  });

  test('When a burnt-out lamp could make no other valid digit, then the code stands', () => {
    // 5 + 8 = 13 and 3 + 8 = 11 are above 9.
    expect(codePosterior(heronCoding, evidenceFor(5), evidenceFor(3), distrust(3, 1))[0]?.probability).toBeGreaterThan(0.9999);
  });

  test('When a lamp was never seen lit, then its chance of being burnt out is what the code lacks', () => {
    // Contract: 0.5 % a lamp. Bayes: 1 / (1 + 0.005).
    const [likeliest, other] = codePosterior(heronCoding, evidenceFor(1), evidenceFor(6), distrust(3, 0.005));
    expect(likeliest).toMatchObject({ code: 'G1K6' });
    expect(likeliest?.probability).toBeCloseTo(1 / 1.005, 4);
    expect(other).toMatchObject({ code: 'G9K6' });
  });

  test('When the lamps add up to more than the largest digit, then no code is likely', () => {
    expect(codePosterior(heronCoding, evidenceFor(13), evidenceFor(3), TRUSTED)[0]?.probability ?? 0).toBeLessThan(1e-9);
  });
});

describe('repeats as a repetition code', () => {
  /** The first digit's lamp of weight 1, seen in n phases of which some are flipped: what is decoded. */
  const decodedBit = (seen: readonly (0 | 1)[]): number => {
    const evidence = evidenceFor(0);
    evidence[0] = seen.reduce<number>((sum, bit) => sum + (bit === 1 ? 2 : -2), 0);
    return codePosterior(heronCoding, evidence, evidenceFor(3), TRUSTED)[0]?.onDigit ?? Number.NaN;
  };

  // MacKay, Information Theory, Inference, and Learning Algorithms, figures 1.8 to 1.10 (book p. 7): sent 0 0 1 0 1 1 0,
  // received 000 001 111 000 010 111 000, decoded 0 0 1 0 0 1 0.
  test('When triplets are received as in the textbook, then the majority of each is decoded', () => {
    const received = ['000', '001', '111', '000', '010', '111', '000'];
    expect(received.map((triplet) => decodedBit([...triplet].map((bit) => Number(bit) as 0 | 1)))).toEqual([0, 0, 1, 0, 0, 1, 0]);
  });

  // MacKay, exercise 1.3: p_b = sum over n from (N+1)/2 to N of C(N,n) f^n (1-f)^(N-n); computed there: N = 3, f = 0.1: 0.028 (0.03 in print);
  // N = 5: 0.00856; N = 3, f = 0.05: 0.00725; N = 5, f = 0.2: 0.05792 (published check values, topic 9).
  test.each([
    [3, 0.1, 0.028],
    [5, 0.1, 0.00856],
    [7, 0.1, 0.002728],
    [3, 0.05, 0.00725],
    [5, 0.2, 0.05792],
  ])('When a lamp is seen %i times and misread with probability %f, then the error is %f', (repeats, flip, published) => {
    let error = 0;
    for (let flips = 0; flips < 1 << repeats; flips += 1) {
      const seen = Array.from({ length: repeats }, (_, k): 0 | 1 => (((flips >> k) & 1) === 1 ? 1 : 0));
      const wrong = seen.filter((bit) => bit === 1).length;
      if (decodedBit(seen) !== 0) error += flip ** wrong * (1 - flip) ** (repeats - wrong);
    }
    expect(error).toBeCloseTo(published, 6);
  });
});
