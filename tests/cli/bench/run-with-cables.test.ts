import { afterEach, expect, test } from 'vitest';
import { runScript } from '../../../cli/bench/run-script.js';
import { simulatedTechnician } from '../../../cli/bench/simulated-technician.js';
import { openRig, type OpenRig } from '../../../cli/instruments/rig.js';
import { RunJournal } from '../../../cli/journal/run-journal.js';
import { decodeCapture } from '../../../shared/decode/decode-capture.js';
import { readCapture } from '../../../shared/lamps/read-capture.js';
import { benchTerminal, type BenchTerminal } from '../../helpers/bench-terminal.js';
import { shopScript } from '../../helpers/unit-facts.js';
import { unitOnTheBench } from '../../helpers/unit-on-bench.js';

let bench: BenchTerminal;
let rig: OpenRig;
afterEach(async () => {
  await rig.close();
  bench.remove();
});

test('When plugs come out and answers come late in a whole run, then the run gets through, says so, and every reading is the right one', async () => {
  bench = benchTerminal();
  const { context } = bench;
  rig = await openRig('sim:heron-cables', bench.home, { say: (line) => context.stderr.say(line), signal: context.interruption.signal });
  if (!rig.hands) throw new Error('a simulated rig has hands');
  const unit = unitOnTheBench();
  const script = shopScript('h6-find');
  const { name, title, prove } = script;
  const journal = RunJournal.create(context.home, {
    id: context.newId(),
    server: context.server,
    unit: 412,
    by: unit.by,
    script: { name, title, prove, text: '' },
    rig: { name: rig.name, simulated: true },
    startedAt: context.now().toISOString(),
    pid: process.pid,
  });
  const technician = simulatedTechnician(context, rig.hands);
  const end = await context.interruption.hold(() => runScript({ context, unit, script, scriptText: '', rig, technician, journal }));
  journal.close();

  expect([end.interrupted, end.exitCode]).toEqual([false, 0]);
  const readings = end.results.flatMap((result) => (result.kind === 'measure' ? [[result.stepId, result.reading.judgement.value]] : []));
  // The values of the scenario, behind what goes wrong with each: twice, an older value before it, an unplugged meter.
  expect(Object.fromEntries(readings)).toMatchObject({ 'protective-conductor': 0.084, insulation: 2.31, 'drain-pump-winding': 157.7 });
  const capture = end.results.find((result) => result.kind === 'capture');
  if (capture?.kind !== 'capture') throw new Error('the script records the lamps');
  const { gaps, cut, timesUs } = readCapture(capture.file);
  expect(cut).toBe(false);
  // The probe was away for 4 s at 100 Hz, and its clock began anew once more.
  expect(Math.max(...gaps.map(({ lost }) => lost))).toBeGreaterThanOrEqual(380);
  expect(timesUs.every((timeUs, index) => index === 0 || timeUs > (timesUs[index - 1] ?? 0))).toBe(true);
  expect(bench.stderr()).toContain('are swapped on their ports');
  expect(bench.stderr()).toMatch(/P-01 on \S+: it was unplugged or switched off\. Waiting up to 60 s/);
  expect(bench.stderr()).toContain('the recording goes on, with a gap');
  // A machine with nothing wrong shows no code; what was not seen is no part of a ready blink, and becomes no code.
  const answer = decodeCapture(readCapture(capture.file), unit.sheet);
  expect(answer.codes).toEqual([]);
  expect(answer.segments.map(({ kind }) => kind)).toEqual(['ready', 'unreadable', 'ready']);
});
