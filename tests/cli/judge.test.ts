import { readFileSync } from 'node:fs';
import { describe, expect, test } from 'vitest';
import { runJudge, type JudgeOptions } from '../../cli/commands/judge.js';

interface JudgeCase {
  says: string;
  args: string[];
  exit: number;
  answer?: Record<string, number | string>;
}

/** The contract's judged values, given with the job as judge.json. */
const { cases } = JSON.parse(readFileSync(new URL('../fixtures/judge.json', import.meta.url), 'utf8')) as { cases: JudgeCase[] };

/** The options that the command line would fill; undefined where it would refuse before the command runs. */
function optionsOf(args: readonly string[]): JudgeOptions | undefined {
  const options: Record<string, string | boolean> = {};
  const rest = args.slice(1);
  while (rest.length > 0) {
    const word = rest.shift() ?? '';
    if (word === '--json') options['json'] = true;
    else if (word.includes('=')) options[word.slice(2, word.indexOf('='))] = word.slice(word.indexOf('=') + 1);
    else options[word.slice(2)] = rest.shift() ?? '';
  }
  const known = ['value', 'unit', 'low', 'high', 'accuracy', 'resolution', 'coverage', 'json'];
  const wholeUsage =
    Object.keys(options).every((name) => known.includes(name)) &&
    ['value', 'unit', 'accuracy', 'resolution'].every((name) => name in options);
  return wholeUsage ? (options as unknown as JudgeOptions) : undefined;
}

async function run(options: JudgeOptions): Promise<{ exit: number; stdout: string; stderr: string }> {
  const written = { stdout: '', stderr: '' };
  const exit = await runJudge(options, {
    stdout: { write: (text) => (written.stdout += text) },
    stderr: { write: (text) => (written.stderr += text) },
  });
  return { exit, ...written };
}

describe('refettle judge', () => {
  for (const { says, args, exit, answer } of cases) {
    const options = optionsOf(args);
    // Missing and unknown options are refused by the command line itself and are tested there.
    if (options === undefined) continue;
    test(`When ${says}, then it exits ${exit}${answer ? ` and says ${answer['verdict']}` : ''}`, async () => {
      const outcome = await run(options);
      expect(outcome.exit).toBe(exit);
      if (answer === undefined) {
        expect(outcome.stderr).not.toBe('');
        return;
      }
      const printed = JSON.parse(outcome.stdout) as Record<string, number | string>;
      expect(outcome.stdout.trimEnd()).not.toContain('\n');
      expect(Object.keys(printed)).toEqual(Object.keys(answer));
      for (const [name, expected] of Object.entries(answer)) {
        const got = printed[name];
        if (typeof expected === 'string') expect(got, name).toBe(expected);
        // The fixture's own tolerance: 1e-6 relative, and 1e-6 absolute for the probability.
        else
          expect(Math.abs(Number(got) - expected), name).toBeLessThanOrEqual(
            name === 'conformanceProbability' ? 1e-6 : 1e-6 * Math.abs(expected),
          );
      }
    });
  }

  test('When every case of the fixture is counted, then only the two that the command line refuses were left to it', () => {
    expect(cases.filter(({ args }) => optionsOf(args) === undefined).map(({ says }) => says)).toEqual(['an unknown option', 'no accuracy']);
  });

  const leakage: JudgeOptions = { value: '3.44', unit: 'mA', high: '3.5', accuracy: '2%+5', resolution: '0.01' };
  test.each([
    // Figures and words from the look's own sketches of these readings.
    [{ ...leakage }, '3.44 mA ±0.14  at most 3.50 mA  ◧ inconclusive\n', 1],
    [
      { value: '157.7', unit: 'ohm', low: '140', high: '180', accuracy: '0.5%+3', resolution: '0.1' },
      '157.7 Ω ±1.3  140 to 180 Ω  ■ pass\n',
      0,
    ],
    [
      { value: '96.8', unit: 'ohm', low: '140', high: '180', accuracy: '0.5%+3', resolution: '0.1' },
      '96.8 Ω ±0.9  140 to 180 Ω  ✕ fail\n',
      1,
    ],
    [{ value: '2.31', unit: 'Mohm', low: '1.0', accuracy: '3%+5', resolution: '0.01' }, '2.31 MΩ ±0.14  at least 1.00 MΩ  ■ pass\n', 0],
  ] satisfies [JudgeOptions, string, number][])(
    'When a person asks (%#), then one line says reading, spread, limits and verdict',
    async (options, line, exit) => {
      expect(await run(options)).toEqual({ exit, stdout: line, stderr: '' });
    },
  );

  test('When a figure cannot be read, then the message names its option and says how to write it', async () => {
    const outcome = await run({ ...leakage, high: '3,5' });
    expect(outcome).toMatchObject({ exit: 3, stdout: '' });
    expect(outcome.stderr).toBe("Can't judge this: --high: '3,5' is no number: write the decimals behind a point, not a comma.\n");
  });

  test('When a program asks and a figure cannot be read, then standard output holds one line of JSON with the reason', async () => {
    const outcome = await run({ ...leakage, accuracy: '2%', json: true });
    expect(outcome.exit).toBe(3);
    expect(JSON.parse(outcome.stdout)).toMatchObject({ error: { reason: expect.stringContaining('--accuracy') as string } });
  });
});
