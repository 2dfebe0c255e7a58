import { expect, test } from 'vitest';
import { ApiProblemError, NobodyToAskError, ServerUnreachableError, StoppedError, UsageError } from '../../cli/errors.js';
import { firstExitCode } from '../../cli/exit-codes.js';
import { OverloadError } from '../../cli/instruments/instrument-error.js';
import { exitCodeOf, reportError, wordsOf } from '../../cli/report-error.js';
import { BadInputError, NotYetError } from '../../shared/errors.js';
import { readFileSync, readdirSync } from 'node:fs';
import { join } from 'node:path';
import { benchTerminal } from '../helpers/bench-terminal.js';

// Codes and their order: contract, section 5.
const problem = new ApiProblemError({
  status: 409,
  kind: 'gate',
  title: 'A safety gate is shut',
  detail: 'insulation is not done',
  remedy: 'a lead overrides with a reason',
});

test.each([
  [new UsageError('x'), 2],
  [new NobodyToAskError('Which?', 'give it with --which'), 2],
  [new BadInputError('x'), 3],
  [new NotYetError('x'), 3],
  [new OverloadError({ instrument: 'M-03', port: '/dev/ttyUSB0' }, 1), 4],
  [new ServerUnreachableError('http://127.0.0.1:4780', 'nothing listens there'), 5],
  [problem, 5],
  [new StoppedError(), 130],
  [new Error('x'), 70],
  ['thrown text', 70],
])('When the program ends with %o, then it exits %i', (error, code) => {
  expect(exitCodeOf(error)).toBe(code);
});

test.each([
  [[0, 0], 0],
  [[1, 5], 1],
  [[0, 5], 5],
  [[5, 1, 4], 4],
  [[4, 3, 1], 3],
  [[3, 130], 130],
  [[130, 70, 2], 2],
  [[130, 70], 70],
  [[], 0],
])('When %j apply, then the program exits %i', (codes, code) => {
  expect(firstExitCode(codes)).toBe(code);
});

test('When an error is said, then it says what happened, where, and what to do', () => {
  expect(wordsOf(new BadInputError('the weight 2 stands twice', { file: 'heron.yaml', line: 12 }))).toBe(
    'heron.yaml, line 12: the weight 2 stands twice.',
  );
  expect(wordsOf(problem)).toBe('The server refuses. A safety gate is shut: insulation is not done.\nA lead overrides with a reason.');
  expect(wordsOf(new ServerUnreachableError('http://127.0.0.1:4780', 'nothing listens there'))).toContain('REFETTLE_SERVER');
  expect(wordsOf(new OverloadError({ instrument: 'M-03', port: '/dev/ttyUSB0' }, 1))).toContain('M-03 on /dev/ttyUSB0');
});

test('When Refettle itself is at fault, then a report is written, its place is said, and that nothing recorded was lost', () => {
  const bench = benchTerminal();
  expect(reportError(new TypeError('x is not a function'), bench.context)).toBe(70);
  const reports = join(bench.home, 'reports');
  const [report = ''] = readdirSync(reports);
  expect(bench.stderr()).toContain(join(reports, report));
  expect(bench.stderr()).toMatch(/Nothing that was recorded is lost/);
  expect(readFileSync(join(reports, report), 'utf8')).toContain('x is not a function');
  bench.remove();
});
