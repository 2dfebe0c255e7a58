import { describe, expect, test } from 'vitest';
import { judgeExpectation } from '../../../shared/script/judge-expect.js';
import { answer, heron, showsCode, unreadable } from '../../helpers/unit-facts.js';

describe('What a capture shows against what the script expects', () => {
  test.each([
    ['one code, and shows it', 'G5K3', showsCode('G5K3'), 'pass', 'G5K3'],
    ['one code, and shows another', 'G5K3', showsCode('G2K9'), 'fail', 'G2K9'],
    ['one code, and nothing is shown', 'G5K3', answer(), 'inconclusive', 'no code'],
    ['any code, and shows one', 'any', showsCode('G2K9'), 'pass', 'G2K9'],
    ['any code, and nothing can be read', 'any', unreadable(), 'inconclusive', 'no code, a stretch unreadable'],
    ['no code, and proves it', 'none', answer(), 'pass', 'ready blink only, 25 s'],
    ['no code, and shows one', 'none', showsCode('G5K3'), 'fail', 'shows G5K3'],
    ['no code, and nothing can be read', 'none', unreadable(), 'inconclusive', 'a stretch of it is unreadable'],
  ])('When it expects %s, then the verdict follows', (_, expected, given, verdict, seen) => {
    expect(judgeExpectation(expected, given, heron)).toEqual({ verdict, seen });
  });
});
