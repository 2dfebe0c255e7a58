import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { verdictSchema, worstVerdict } from '../../shared/verdict.js';

describe('Gate 3, the worst of fail, inconclusive, not done, pass', () => {
  test.each([
    [['pass', 'pass'], 'pass'],
    [['pass', 'not done'], 'not done'],
    [['not done', 'inconclusive', 'pass'], 'inconclusive'],
    [['inconclusive', 'fail', 'not done'], 'fail'],
  ] as const)('When the steps came to %j, then the run is %s', (verdicts, worst) => {
    expect(worstVerdict(verdicts)).toBe(worst);
  });
  test('When a run judged nothing, then it is inconclusive', () => {
    expect(worstVerdict([])).toBe('inconclusive');
  });
  test('When anything but passes is among them, then the run is no pass', () => {
    fc.assert(
      fc.property(
        fc.array(fc.constantFrom(...verdictSchema.options), { minLength: 1 }),
        (verdicts) => (worstVerdict(verdicts) === 'pass') === verdicts.every((one) => one === 'pass'),
      ),
    );
  });
});
