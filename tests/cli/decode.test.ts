import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, describe, expect, test } from 'vitest';
import { runDecode, type DecodeOptions } from '../../cli/commands/decode.js';
import { decodeAnswerSchema } from '../../shared/decode/answer.js';
import { expectAnswer, type ExampleCase } from '../helpers/compare-answer.js';
import { examplePath, exampleText } from '../helpers/fixtures.js';

const SHEET = examplePath('heron-h6.yaml');
const capture = (name: string): string => examplePath(`captures/${name}.lamps.ndjson`);
const folder = mkdtempSync(join(tmpdir(), 'decode-'));
afterAll(() => rmSync(folder, { recursive: true }));

async function decode(options: Partial<DecodeOptions> & { files: string[] }) {
  const out: string[] = [];
  const err: string[] = [];
  const io = { stdout: { write: (text: string) => out.push(text) }, stderr: { write: (text: string) => err.push(text) } };
  const exitCode = await runDecode({ sheet: SHEET, ...options }, io);
  return { exitCode, stdout: out.join(''), stderr: err.join('') };
}
const linesOf = (stdout: string): unknown[] =>
  stdout
    .split('\n')
    .slice(0, -1)
    .map((line) => JSON.parse(line) as unknown);

const { cases } = JSON.parse(exampleText('decode.json')) as { cases: ExampleCase[] };

describe('refettle decode --json', () => {
  test.each(cases.filter(({ sheet }) => sheet === 'heron-h6.yaml'))(
    'When $file is decoded ($says), then answer and exit code are those of the contract',
    async (example) => {
      const file = examplePath(example.file);
      const { exitCode, stdout, stderr } = await decode({ files: [file], json: true });
      expect(exitCode).toBe(example.exit);
      expect(stderr).toBe('');
      const [line, ...more] = linesOf(stdout) as [{ file: string; error?: { line: number; reason: string } }];
      expect(more).toEqual([]);
      expect(line.file).toBe(file);
      if (example.error !== undefined) {
        expect(line.error).toEqual({ line: example.error.line, reason: expect.any(String) as string });
        return;
      }
      const { file: _, ...answer } = line;
      expectAnswer(decodeAnswerSchema.parse(answer), example);
    },
  );

  test('When one of several files is bad, then the others are decoded all the same, in order', async () => {
    const { exitCode, stdout } = await decode({
      files: [capture('01-one-code'), capture('60-empty'), capture('12-unproved-lamp')],
      json: true,
    });
    expect(exitCode).toBe(3);
    const lines = linesOf(stdout) as { codes?: { code: string }[]; error?: { line: number } }[];
    expect(lines.map(({ codes, error }) => codes?.map(({ code }) => code) ?? error?.line)).toEqual([['G5K3'], 1, []]);
  });

  test('When a file is not there, then that is bad input with a reason', async () => {
    const { exitCode, stdout } = await decode({ files: [join(folder, 'nowhere.lamps.ndjson')], json: true });
    expect(exitCode).toBe(3);
    expect(linesOf(stdout)).toEqual([{ file: join(folder, 'nowhere.lamps.ndjson'), error: { reason: 'there is no such file' } }]);
  });

  test('When something is unreadable in one file, then the exit code is 1', async () => {
    expect((await decode({ files: [capture('01-one-code'), capture('15-wash-cycle')], json: true })).exitCode).toBe(1);
  });

  test.each([
    ['0.99', ['G1K6']],
    ['0.999', []],
    ['0', ['G1K6']],
  ])('When --min-confidence is %s, then %j is stated', async (minConfidence, codes) => {
    const { stdout } = await decode({ files: [capture('12-unproved-lamp')], json: true, minConfidence });
    expect((linesOf(stdout)[0] as { codes: { code: string }[] }).codes.map(({ code }) => code)).toEqual(codes);
  });
});

describe('wrong usage and bad sheets', () => {
  test.each(['1.5', '-0.1', 'sure', '', 'NaN'])('When --min-confidence is "%s", then that is wrong usage', async (minConfidence) => {
    const { exitCode, stdout, stderr } = await decode({ files: [capture('01-one-code')], json: true, minConfidence });
    expect(exitCode).toBe(2);
    expect(stdout).toBe('');
    expect(stderr).toMatch(/from 0 to 1/);
  });

  test('When the sheet is wrong, then nothing is decoded and the line is named', async () => {
    const sheet = join(folder, 'wrong.yaml');
    writeFileSync(sheet, exampleText('heron-h6.yaml').replace('rinse: 4', 'rinse: 2'));
    const { exitCode, stdout, stderr } = await decode({ sheet, files: [capture('01-one-code')], json: true });
    expect(exitCode).toBe(3);
    expect(stdout).toBe('');
    expect(stderr).toMatch(/wrong\.yaml, line 18: .*weight 2 stands twice/);
  });

  test('When the sheet is not there, then that is said', async () => {
    const { exitCode, stderr } = await decode({ sheet: join(folder, 'none.yaml'), files: [capture('01-one-code')] });
    expect(exitCode).toBe(3);
    expect(stderr).toMatch(/none\.yaml: there is no such file/);
  });

  test.each(['wren-w3.yaml', 'plover-p4.yaml'])(
    'When %s needs a coding that is not read yet, then it says so with exit code 3',
    async (name) => {
      const example = cases.find(({ sheet }) => sheet === name);
      const { exitCode, stdout, stderr } = await decode({
        sheet: examplePath(name),
        files: [examplePath(example?.file ?? '')],
        json: true,
      });
      expect(exitCode).toBe(3);
      expect(stdout).toBe('');
      expect(stderr).toMatch(/cannot decode (flash-count|steady-pattern) sheets yet/);
    },
  );
});

describe('refettle decode for people', () => {
  test('When two codes are read, then each has its lamp face and its sums', async () => {
    const { exitCode, stdout } = await decode({ files: [capture('02-two-codes')] });
    expect(exitCode).toBe(0);
    const words = stdout.split('\n').map((line) => line.trimEnd());
    expect(words[1]).toMatch(/^ {2}0\.5 to 5\.[45] s +ready blink: service mode on$/);
    expect(words[2]).toMatch(/^ {2}6\.1 to 20\.5 s +G5K3, 6 times, confidence 0\.9999$/);
    expect(words[3]?.trim()).toBe('G  ● ○ ● ○ ● -   4 + 1 = 5    Water level does not fall in time');
    expect(words[4]?.trim()).toBe('K  ● ● ○ ○ ○ -   2 + 1 = 3');
    expect(words[5]).toMatch(/G2K9, 5 times/);
    expect(words[7]?.trim()).toBe('K  ● ○ ○ ● ○ -   8 + 1 = 9');
  });

  test('When a lamp is burnt out and matters, then the reason, the likeliest codes and the lamp are named', async () => {
    const { exitCode, stdout } = await decode({ files: [capture('11-dead-lamp-matters')] });
    expect(exitCode).toBe(1);
    expect(stdout).toMatch(/unreadable: lamp 'drain' is burnt out and could change the code/);
    expect(stdout).toMatch(/perhaps G1K1, 0\.24/);
    expect(stdout).toMatch(/burnt out: drain/);
  });

  test('When a file is bad input, then the reason is on standard error and the others on standard output', async () => {
    const { exitCode, stdout, stderr } = await decode({ files: [capture('68-blank-line'), capture('17-extra-column')] });
    expect(exitCode).toBe(3);
    expect(stderr).toMatch(/68-blank-line\.lamps\.ndjson, line 30: a blank line/);
    expect(stdout).toMatch(/G8K5/);
    expect(stdout).toMatch(/note: lamp 'eco' is not in the sheet/);
  });

  test('When there is nothing in the capture, then that is said', async () => {
    const { exitCode, stdout } = await decode({ files: [capture('26-no-samples')] });
    expect(exitCode).toBe(1);
    expect(stdout).toMatch(/nothing to read/);
  });
});
