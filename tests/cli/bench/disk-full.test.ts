// A disk that is full: /dev/full takes nothing and says ENOSPC, as a real one does (full(4)).
import { readFileSync, renameSync, symlinkSync } from 'node:fs';
import { afterEach, expect, test } from 'vitest';
import { runScript } from '../../../cli/bench/run-script.js';
import { simulatedTechnician } from '../../../cli/bench/simulated-technician.js';
import { writeWhole } from '../../../cli/home.js';
import { openRig, type OpenRig } from '../../../cli/instruments/rig.js';
import { journalFileOf, readRunJournal, RunJournal, writtenRun } from '../../../cli/journal/run-journal.js';
import { BadInputError } from '../../../shared/errors.js';
import type { StepResult } from '../../../shared/script/run-log.js';
import { benchTerminal, type BenchTerminal } from '../../helpers/bench-terminal.js';
import { shopScript } from '../../helpers/unit-facts.js';
import { unitOnTheBench } from '../../helpers/unit-on-bench.js';

let bench: BenchTerminal;
let rig: OpenRig | undefined;
afterEach(async () => {
  await rig?.close();
  bench.remove();
});

test('When the disk is full, then the run stops, says so, calls nothing recorded that is not, and loses nothing of before', async () => {
  bench = benchTerminal();
  const { context } = bench;
  const unit = unitOnTheBench();
  const script = shopScript('h6-find');
  rig = await openRig('sim:heron-mend', bench.home);
  if (!rig.hands) throw new Error('nobody is at the bench');
  const id = context.newId();
  const startedAt = context.now().toISOString();
  const first = RunJournal.create(context.home, {
    id,
    server: context.server,
    unit: 412,
    by: unit.by,
    script: { name: script.name, title: script.title, prove: false, text: '' },
    rig: { name: rig.name, simulated: true },
    startedAt,
    pid: process.pid,
  });
  const isolated: StepResult = { kind: 'caution', stepId: 'isolate', title: 'Isolate', startedAt, endedAt: startedAt, answer: 'yes' };
  first.record(isolated);
  first.close();
  const before = readFileSync(journalFileOf(context.home, id), 'utf8');
  const written = writtenRun(context.home, id);

  const aside = `${bench.home}/before.ndjson`;
  renameSync(journalFileOf(context.home, id), aside);
  symlinkSync('/dev/full', journalFileOf(context.home, id));
  const journal = RunJournal.goOn(context.home, written);
  const running = runScript({
    context,
    unit,
    script,
    scriptText: '',
    rig,
    technician: simulatedTechnician(context, rig.hands),
    journal,
    before: written.results,
  });
  await expect(running).rejects.toThrow(BadInputError);
  await expect(running).rejects.toThrow(/the disk is full.*was said to be recorded before is safe/);
  journal.close();
  // The next step was not even asked, and no line says that anything was done.
  expect(bench.stderr()).not.toMatch(/visual|pass/i);
  expect(readFileSync(aside, 'utf8')).toBe(before);
  expect(readRunJournal(before)?.results).toEqual([isolated]);
});

test('When something is to be kept on a full disk, then the old file stays as it was', () => {
  bench = benchTerminal();
  const file = `${bench.home}/kept.json`;
  writeWhole(file, 'old');
  // What is written beside it first goes to a full disk.
  symlinkSync('/dev/full', `${file}.${process.pid}.new`);
  expect(() => writeWhole(file, 'new')).toThrow(/the disk is full/);
  expect(readFileSync(file, 'utf8')).toBe('old');
});
