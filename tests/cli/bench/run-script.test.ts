import { writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { setTimeout } from 'node:timers/promises';
import { afterEach, describe, expect, test } from 'vitest';
import { runScript, type RunEnd } from '../../../cli/bench/run-script.js';
import { simulatedTechnician } from '../../../cli/bench/simulated-technician.js';
import type { Technician } from '../../../cli/bench/technician.js';
import { terminalTechnician } from '../../../cli/bench/terminal-technician.js';
import { openRig, type OpenRig } from '../../../cli/instruments/rig.js';
import { HERON_MEND } from '../../../cli/instruments/simulated/scenarios/heron-mend.js';
import { RunJournal, writtenRun } from '../../../cli/journal/run-journal.js';
import { decodeCapture } from '../../../shared/decode/decode-capture.js';
import type { UnitEvent } from '../../../shared/history/events.js';
import { settleRun } from '../../../shared/history/settle-run.js';
import { readCapture } from '../../../shared/lamps/read-capture.js';
import { runGateBreach } from '../../../shared/readiness/run-gates.js';
import { runVerdict, stepVerdict } from '../../../shared/script/run-verdict.js';
import type { Script } from '../../../shared/script/schema.js';
import { benchTerminal, type BenchTerminal } from '../../helpers/bench-terminal.js';
import { deadTests, goodReading, heron, inspection, intake, shopScript, wil } from '../../helpers/unit-facts.js';
import { unitOnTheBench } from '../../helpers/unit-on-bench.js';

let bench: BenchTerminal;
let rig: OpenRig;
afterEach(async () => {
  await rig.close();
  bench.remove();
});

/** A run on a simulated rig, with the technician of its scenario or a person at the terminal. */
async function run(
  script: Script,
  parts: { scenario?: string; person?: boolean; events?: UnitEvent[]; technician?: Partial<Technician> } = {},
) {
  const unit = unitOnTheBench(parts.events);
  rig = await openRig(`sim:${parts.scenario ?? 'heron-mend'}`, bench.home);
  const { context } = bench;
  const technician =
    parts.person === true
      ? terminalTechnician(context, 'GBP')
      : rig.hands && { ...simulatedTechnician(context, rig.hands), ...parts.technician };
  if (!technician) throw new Error('nobody is at the bench');
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
  const end = await context.interruption.hold(() => runScript({ context, unit, script, scriptText: '', rig, technician, journal }));
  journal.close();
  expect(writtenRun(context.home, journal.header.id).results.map(({ stepId, kind }) => ({ stepId, kind }))).toEqual(
    end.results.map(({ stepId, kind }) => ({ stepId, kind })),
  );
  return { end, verdict: runVerdict(end.results, end.interrupted) };
}

const kinds = ({ results }: RunEnd): Record<string, string> => Object.fromEntries(results.map(({ stepId, kind }) => [stepId, kind]));
/** Some steps of the script that finds the fault. */
const stepsOf = (...ids: string[]): Script => {
  const script = shopScript('h6-find');
  return { ...script, steps: script.steps.filter(({ id }) => ids.includes(id)) };
};
const POWERED = stepsOf('power-caution', 'service-mode', 'lamps', 'code');

describe('A bench run on a simulated rig', () => {
  test('When the drain pump has shorted turns, then finding the fault reads both codes and the winding fails', async () => {
    bench = benchTerminal();
    const { end, verdict } = await run(shopScript('h6-find'));
    expect([verdict, end.interrupted, end.exitCode]).toEqual(['fail', false, 0]);
    // The scenario: codes G5K3 and G2K9, 96.4 ohm where the sheet asks for 140 to 180.
    expect(end.results.find(({ stepId }) => stepId === 'code')).toMatchObject({ kind: 'expect', seen: 'G5K3, G2K9', verdict: 'pass' });
    expect(end.results.find(({ stepId }) => stepId === 'drain-pump-winding')).toMatchObject({
      reading: { judgement: { value: 96.4, unit: 'ohm', verdict: 'fail' }, instrument: { id: 'M-03' } },
    });
    expect(bench.stderr()).toContain('> yes  (simulated technician)');
    expect(bench.stdout()).toBe('');
  });

  test('When the dead tests are not done, then the gate is shut before anybody is told to switch on, and nothing energised is done', async () => {
    bench = benchTerminal();
    const { end, verdict } = await run(POWERED);
    expect(kinds(end)).toEqual({ 'power-caution': 'skipped', 'service-mode': 'skipped', lamps: 'skipped', code: 'skipped' });
    expect(verdict).toBe('not done');
    expect(bench.stderr()).toMatch(
      /A safety gate is shut: visual check is not done; protective conductor is not done; insulation is not done/,
    );
    expect(bench.stderr()).toMatch(/To open it: do visual check, protective conductor, insulation in this order/);
    expect(bench.stderr()).not.toContain('CAUTION');
  });

  test('When a dead test fails in the run itself, then the steps on mains that follow are skipped', async () => {
    bench = benchTerminal();
    const { end, verdict } = await run(shopScript('h6-find'), {
      technician: { looks: () => Promise.resolve({ verdict: 'fail', note: 'cord chafed' }) },
    });
    expect(kinds(end)).toMatchObject({
      visual: 'inspect',
      'protective-conductor': 'skipped',
      insulation: 'skipped',
      'power-caution': 'skipped',
      lamps: 'skipped',
      'drain-pump-winding': 'measure',
    });
    expect(verdict).toBe('fail');
  });

  test('When a gate was shut for a step on mains, then a dead test after it is still done', async () => {
    bench = benchTerminal();
    const find = shopScript('h6-find');
    const pick = (id: string) => find.steps.filter((step) => step.id === id);
    const { end } = await run({
      ...find,
      steps: [...pick('power-caution'), ...pick('lamps'), ...pick('visual'), ...pick('protective-conductor')],
    });
    expect(kinds(end)).toEqual({ 'power-caution': 'skipped', lamps: 'skipped', visual: 'inspect', 'protective-conductor': 'measure' });
  });

  test('When a caution is answered with no, then the rig is closed, the rest is skipped, and the run is not done', async () => {
    bench = benchTerminal();
    const { end, verdict } = await run(shopScript('h6-find'), { technician: { confirms: () => Promise.resolve('no') } });
    expect(end.results[0]).toMatchObject({ kind: 'caution', answer: 'no' });
    expect(end.results.slice(1).every((result) => result.kind === 'skipped')).toBe(true);
    expect([verdict, end.interrupted]).toEqual(['not done', false]);
  });

  test('When only something is written down and nothing judged, then the run is inconclusive', async () => {
    bench = benchTerminal();
    const { end, verdict } = await run(shopScript('h6-mend'));
    expect(end.results.find(({ stepId }) => stepId === 'mended')).toMatchObject({
      kind: 'repair',
      repair: { part: 'Drain pump', costMinor: 2450 },
    });
    expect(verdict).toBe('inconclusive');
  });

  test('When a meter has no number and nobody is there to try again, then nothing is recorded for it, the run is interrupted, and it is an instrument’s fault', async () => {
    bench = benchTerminal();
    const find = shopScript('h6-find');
    const { end, verdict } = await run(
      {
        ...find,
        steps: [
          { id: 'isolate', kind: 'caution', title: 'Isolate', text: 'Plug out.' },
          { id: 'heater', kind: 'measure', title: 'Heater', check: 'heater' },
          { id: 'remarks', kind: 'note', title: 'Remarks' },
        ],
      },
      { scenario: 'heron-flaky' },
    );
    expect([end.exitCode, end.interrupted, verdict]).toEqual([4, true, 'not done']);
    expect(kinds(end)).toEqual({ isolate: 'caution' });
    expect(bench.stderr()).toContain('Nothing was recorded for this step.');
  });

  test('When the probe is pulled out after a code was shown, then those lamps stay in the log, whatever the next try shows (gate 4)', async () => {
    bench = benchTerminal();
    // Shows G5K3 from 6 s to 25 s; nobody waits for the plug, so the step is offered again until it is back.
    const file = join(bench.home, 'pulled.yaml');
    writeFileSync(file, `${HERON_MEND}\nprobeFaults: [{fault: unplug, at: 24, seconds: 2}]\n`);
    const { end } = await run(POWERED, {
      scenario: file,
      events: [intake(), ...deadTests({ simulated: true })],
      technician: { attended: true, triesAgain: () => setTimeout(20, true) },
    });
    const lamps = end.results.filter(({ stepId }) => stepId === 'lamps');
    expect(lamps.map(({ kind }) => kind)).toEqual(['cut', 'capture']);
    const [cut] = lamps;
    expect(cut?.kind === 'cut' && decodeCapture(readCapture(cut.file), heron).codes.map(({ code }) => code)).toEqual(['G5K3']);
    expect(bench.stderr()).toContain('The lamps until then are kept; the step itself is not done.');
  });

  test('When Ctrl-C is pressed while lamps are recorded, then what came is kept as a cut, and its step is still to be done', async () => {
    bench = benchTerminal();
    const { context } = bench;
    const ready = [intake(), inspection()];
    const script = stepsOf(
      'visual',
      'protective-conductor',
      'insulation-caution',
      'insulation',
      'discharge',
      'power-caution',
      'service-mode',
      'lamps',
      'code',
    );
    const running = run(script, { events: ready });
    const stopWhenGoing = setInterval(() => {
      if (bench.stderr().includes('10 s of 45 s')) context.interruption.interrupt();
    }, 5);
    const { end, verdict } = await running.finally(() => clearInterval(stopWhenGoing));
    expect([end.exitCode, end.interrupted, verdict]).toEqual([130, true, 'not done']);
    const last = end.results.at(-1);
    expect(last).toMatchObject({ kind: 'cut', stepId: 'lamps' });
    expect(end.left).toBe('stopped');
    expect(last?.kind === 'cut' && last.file).toMatch(/\{"end":\d+\}\n$/);
    expect(bench.left()).toBe(0);
  });
});

describe('A person at the terminal', () => {
  test('When Enter is pressed at a caution, then it is asked again; the answers given are the run’s', async () => {
    bench = benchTerminal({ terminal: true });
    bench.when('Done?', '\r').when('Done?', 'y').when('Verdict?', 'p');
    const { end, verdict } = await run(stepsOf('isolate', 'visual'), { person: true });
    expect(bench.stderr()).toContain('A caution has no default');
    expect(end.results.map((result) => [result.kind, stepVerdict(result)])).toEqual([
      ['caution', undefined],
      ['inspect', 'pass'],
    ]);
    expect(verdict).toBe('pass');
  });

  test('When the meter has no number, then the step is offered again, and the reading of the second try is the one that counts', async () => {
    bench = benchTerminal({ terminal: true });
    bench.when('probes on?', 'y').when('Try this step again?', 'y').when('probes on?', 'y');
    const script = shopScript('h6-prove');
    // The scenario heron-flaky: the meter says not a number once, then 26.8 ohm.
    const { end } = await run(
      { ...script, steps: script.steps.filter(({ id }) => id === 'heater') },
      { person: true, scenario: 'heron-flaky' },
    );
    expect(end.results).toMatchObject([{ kind: 'measure', reading: { judgement: { value: 26.8, verdict: 'pass' } } }]);
    expect(bench.stderr()).toContain('Nothing was recorded for this step.');
    expect(bench.raw()).toBe(0);
  });

  test('When a test at 500 V fails and is tried again, then its caution is asked again, both answers stand in the log, and no gate is breached', async () => {
    bench = benchTerminal({ terminal: true });
    // Caution, probes, the meter's overload; then the same again, which reads 2.31 Mohm; discharged.
    bench.when('Done?', 'y').when('probes on?', 'y').when('Try this step again?', 'y');
    bench.when('Done?', 'y').when('probes on?', 'y').when('Done?', 'y');
    const script = stepsOf('insulation-caution', 'insulation', 'discharge');
    const events = [intake(), inspection(), goodReading('protective-conductor')];
    const { end } = await run(script, { person: true, scenario: 'heron-flaky', events });
    expect(end.results.map(({ stepId }) => stepId)).toEqual(['insulation-caution', 'insulation-caution', 'insulation', 'discharge']);
    const about = {
      script: { name: script.name, title: script.title, prove: false, text: '' },
      rig: { name: 'sim:heron-flaky', simulated: true },
    };
    const log = { id: bench.context.newId(), ...about, startedAt: '2026-03-03T10:00:00Z', endedAt: '2026-03-03T10:05:00Z' };
    const settled = settleRun({ ...log, interrupted: false, people: [], steps: end.results }, script, heron, wil, () =>
      bench.context.newId(),
    );
    expect(runGateBreach(settled, script, heron, { ...unitOnTheBench(events).facts })).toBeUndefined();
  });

  test('When the caution is answered with no before the second try, then nothing is energised any more', async () => {
    bench = benchTerminal({ terminal: true });
    bench.when('Done?', 'y').when('probes on?', 'y').when('Try this step again?', 'y').when('Done?', 'n');
    const { end } = await run(stepsOf('insulation-caution', 'insulation', 'discharge'), {
      person: true,
      scenario: 'heron-flaky',
      events: [intake(), inspection(), goodReading('protective-conductor')],
    });
    expect(end.results.map(({ stepId, kind }) => [stepId, kind])).toEqual([
      ['insulation-caution', 'caution'],
      ['insulation-caution', 'caution'],
      ['insulation', 'skipped'],
      ['discharge', 'skipped'],
    ]);
  });

  test('When probes are not put on, then the check is not done and nothing was measured', async () => {
    bench = benchTerminal({ terminal: true });
    bench.when('probes on?', 'n');
    const script = shopScript('h6-prove');
    const { end, verdict } = await run({ ...script, steps: script.steps.filter(({ id }) => id === 'heater') }, { person: true });
    expect(kinds(end)).toEqual({ heater: 'skipped' });
    expect(verdict).toBe('not done');
  });

  test('When Ctrl-C is pressed at a question, then the run ends as stopped with what it has', async () => {
    bench = benchTerminal({ terminal: true });
    bench.when('Done?', 'y').when('Verdict?', '\u0003');
    const { end } = await run(stepsOf('isolate', 'visual'), { person: true });
    expect([end.exitCode, end.interrupted, kinds(end)]).toEqual([130, true, { isolate: 'caution' }]);
    expect(bench.raw()).toBe(0);
  });
});
