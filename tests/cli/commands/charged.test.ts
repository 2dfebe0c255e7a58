// Leaving, coming back to and closing a run whose insulation test has no discharge; a single one. Everything without a network.
import { afterEach, expect, test } from 'vitest';
import { runAbandon } from '../../../cli/commands/abandon.js';
import { runProgram } from '../../../cli/program.js';
import { waitingEntries } from '../../../cli/journal/outbox.js';
import { writtenRun } from '../../../cli/journal/run-journal.js';
import type { BenchTerminal } from '../../helpers/bench-terminal.js';
import { offlineBench } from '../../helpers/offline-bench.js';
import { PARKED_RUN, parkRun, wholeRun } from '../../helpers/parked-run.js';
import { goodReading, inspection, intake } from '../../helpers/unit-facts.js';

let bench: BenchTerminal;
afterEach(() => bench.remove());

const WARNING = 'The machine may hold the charge of its insulation test';

/** A run of the simulated rig that was left behind this step. */
function leftBehind(stepId: string): void {
  const { steps } = wholeRun({ simulated: true });
  const last = steps.findIndex((step) => step.stepId === stepId);
  parkRun(bench.context, steps.slice(0, last + 1), { name: 'sim:heron-mend', simulated: true });
}

test.each([
  ['insulation', true],
  ['discharge', false],
])('When a run that was left behind %s is abandoned, then it is said whether the machine may be charged', async (stepId, charged) => {
  bench = offlineBench();
  leftBehind(stepId);
  expect(await runAbandon({ run: PARKED_RUN, reason: 'the shift is over' }, bench.context)).toBe(5);
  expect(bench.stderr().includes(WARNING)).toBe(charged);
});

test('When a run is resumed behind its insulation test, then that is said before anything else is asked, and the discharge is next', async () => {
  bench = offlineBench([intake()], { terminal: true });
  leftBehind('insulation');
  bench.when('Done?', 'k');
  await runProgram(['resume', PARKED_RUN, '--rig', 'sim:heron-mend'], bench.context);
  const [first = '', ...rest] = bench.stderr().split('Done?');
  expect(first).toContain(WARNING);
  expect(first).toContain('Discharge through the tester');
  // Left again without it: said again.
  expect(rest.join('')).toContain(WARNING);
  expect(writtenRun(bench.context.home, PARKED_RUN).stop?.how).toBe('parked');
});

test('When a single insulation test fails and is tried again, then its caution is asked again', async () => {
  bench = offlineBench([intake(), inspection(), goodReading('protective-conductor')], { terminal: true });
  // The scenario heron-flaky: the tester says overload once.
  bench.when('Done?', 'y').when('Probes on?', 'y').when('Measure again?', 'y').when('Done?', 'n');
  expect(await runProgram(['measure', '412', 'insulation', '--rig', 'sim:heron-flaky'], bench.context)).toBe(1);
  expect(bench.stderr()).toContain('Not begun.');
  expect(waitingEntries(bench.context.home).entries).toEqual([]);
});

test.each([
  ['y', 0, undefined],
  ['n', 1, true],
  ['\u0003', 130, true],
])(
  'When a single insulation test is answered with %j at its discharge, then it is kept, and counts only with it',
  async (key, code, undischarged) => {
    bench = offlineBench([intake(), inspection(), goodReading('protective-conductor')], { terminal: true });
    const typed = ['--value', '2.31', '--accuracy', '3%+5', '--resolution', '0.01'];
    bench.when('Discharged?', key);
    const exit = await runProgram(['measure', '412', 'insulation', ...typed], bench.context);
    // Without a network the reading waits: 5, where nothing comes before it.
    expect(exit).toBe(code === 0 ? 5 : code);
    const { entries } = waitingEntries(bench.context.home);
    expect(entries).toMatchObject([
      { route: 'recordReading', body: { reading: { checkId: 'insulation', judgement: { verdict: 'pass' } } } },
    ]);
    expect(entries[0]?.route === 'recordReading' && entries[0].body.reading.undischarged).toBe(undischarged);
  },
);
