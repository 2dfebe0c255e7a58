import { spawn } from 'node:child_process';
import { appendFileSync, existsSync, mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterEach, beforeEach, describe, expect, test } from 'vitest';
import { homeOf, type Home } from '../../../cli/home.js';
import { CaptureFile } from '../../../cli/journal/capture-file.js';
import { waitingEntries } from '../../../cli/journal/outbox.js';
import { recoverRuns } from '../../../cli/journal/recover-runs.js';
import { journalFileOf, logOf, readRunJournal, RunJournal, type RunHeader } from '../../../cli/journal/run-journal.js';
import { runVerdict } from '../../../shared/script/run-verdict.js';
import type { StepResult } from '../../../shared/script/run-log.js';
import { benchTerminal } from '../../helpers/bench-terminal.js';
import { heron, wil } from '../../helpers/unit-facts.js';

const RUN = '019af7a0-0000-7000-8000-000000000001';
const CAPTURE = '019af7a0-0000-7000-8000-0000000000c1';
/** No process has this number: it is above what Linux gives out (4194304, proc(5)). */
const GONE = 4_200_000;
const at = (second: number): string => new Date(Date.UTC(2026, 2, 5, 9, 0, second)).toISOString();
const header = (pid = process.pid): RunHeader => ({
  id: RUN,
  server: 'http://127.0.0.1:4780',
  unit: 412,
  by: wil,
  script: { name: 'h6-find', title: 'Find the fault', prove: false, text: 'format: refettle.script' },
  rig: { name: 'bench 2', simulated: false },
  startedAt: at(0),
  pid,
});
const caution: StepResult = { kind: 'caution', stepId: 'isolate', title: 'Isolate', startedAt: at(1), endedAt: at(2), answer: 'yes' };
const looked: StepResult = {
  kind: 'inspect',
  stepId: 'visual',
  title: 'Visual check',
  startedAt: at(3),
  endedAt: at(4),
  inspection: { checkId: 'visual', title: 'Visual check', deadTest: 'visual', verdict: 'pass' },
};

let home: Home;
beforeEach(() => {
  home = homeOf({ REFETTLE_HOME: mkdtempSync(join(tmpdir(), 'refettle-journal-')) });
});
afterEach(() => rmSync(home.folder, { recursive: true, force: true }));

const read = () => readRunJournal(readFileSync(journalFileOf(home, RUN), 'utf8'));
const startCapture = () => {
  const file = new CaptureFile(home, CAPTURE, {
    format: 'refettle.lamps',
    version: 1,
    capturedAt: at(5),
    source: 'probe',
    lamps: heron.lamps.map(({ id }) => id),
    scale: { unit: 'counts', max: 1023 },
    unit: 412,
  });
  file.sample(0, [1, 2, 3, 4, 5, 6]);
  file.sample(10_000, [7, 8, 9, 10, 11, 12]);
  return file;
};

describe('The journal of a run', () => {
  test('When a step has its result, then the result is in the file before the next step begins', () => {
    const journal = new RunJournal(home, header());
    journal.begin({ stepId: 'isolate', kind: 'caution', title: 'Isolate', at: at(1) });
    journal.record(caution);
    expect(read()).toMatchObject({ results: [caution], begun: undefined, end: undefined });
    journal.begin({ stepId: 'visual', kind: 'inspect', title: 'Visual check', at: at(3) });
    expect(read()).toMatchObject({ results: [caution], begun: { stepId: 'visual' } });
    journal.close();
  });

  test('When the last line was torn by a power cut, then everything before it is read', () => {
    const journal = new RunJournal(home, header());
    journal.record(caution);
    journal.record(looked);
    journal.close();
    const text = readFileSync(journalFileOf(home, RUN), 'utf8');
    for (let cut = 1; cut < JSON.stringify({ step: looked }).length; cut += 7) {
      expect(readRunJournal(text.slice(0, -1 - cut))?.results).toEqual([caution]);
    }
    expect(readRunJournal(text.slice(0, -1))?.results).toEqual([caution, looked]);
  });

  test('When a run was broken off while it recorded lamps, then those lamps are kept as a cut capture and the run is closed as interrupted', () => {
    const journal = new RunJournal(home, header());
    journal.record(caution);
    journal.begin({ stepId: 'lamps', kind: 'capture', title: 'The lamps', at: at(5), captureId: CAPTURE });
    const capture = startCapture();
    appendFileSync(capture.path, '[20000,1,2');
    const written = read();
    if (!written) throw new Error('the journal was not read');
    const log = logOf(home, written);
    expect(log).toMatchObject({ interrupted: true, endedAt: at(5), steps: [caution, { kind: 'capture', captureId: CAPTURE }] });
    const kept = log.steps[1];
    expect(kept?.kind === 'capture' && kept.file.trimEnd().split('\n')).toHaveLength(3);
    expect(runVerdict(log.steps, log.interrupted)).toBe('not done');
    journal.close();
    capture.keep();
  });

  test('When a captured step was recorded, then its file stands in the log, whole, and not in the journal', () => {
    const journal = new RunJournal(home, header());
    const capture = startCapture();
    capture.end(20_000);
    const file = readFileSync(capture.path, 'utf8');
    journal.record({
      kind: 'capture',
      stepId: 'lamps',
      title: 'The lamps',
      startedAt: at(5),
      endedAt: at(6),
      captureId: CAPTURE,
      file,
      fromFile: false,
    });
    journal.end(at(7), false);
    journal.close();
    expect(readFileSync(journalFileOf(home, RUN), 'utf8')).not.toContain('refettle.lamps');
    const written = read();
    expect(written && logOf(home, written)).toMatchObject({ interrupted: false, endedAt: at(7), steps: [{ file }] });
  });
});

describe('Runs that were broken off', () => {
  test('When the program that ran it is gone, then the run is closed and waits to be sent, with the run as its key', () => {
    const journal = new RunJournal(home, header(GONE));
    journal.record(caution);
    journal.close();
    const bench = benchTerminal({ home: home.folder });
    expect(recoverRuns(bench.context).map(({ id }) => id)).toEqual([RUN]);
    expect(waitingEntries(home).entries).toMatchObject([
      { id: RUN, route: 'recordRun', params: { number: 412 }, body: { interrupted: true, steps: [caution] } },
    ]);
    expect(bench.stderr()).toContain('broken off');
    expect(existsSync(journalFileOf(home, RUN))).toBe(false);
    expect(recoverRuns(bench.context)).toEqual([]);
  });

  test('When the program that runs it is alive, then it is left alone', () => {
    new RunJournal(home, header()).close();
    expect(recoverRuns(benchTerminal({ home: home.folder }).context)).toEqual([]);
  });

  test('When the program is killed in the middle, then every step that was said to be done is in the file', async () => {
    const program = join(home.folder, 'writer.mts');
    const from = (path: string): string => JSON.stringify(new URL(`../../../${path}`, import.meta.url).href);
    writeFileSync(
      program,
      `import { homeOf } from ${from('cli/home.ts')};
import { RunJournal } from ${from('cli/journal/run-journal.ts')};
const journal = new RunJournal(homeOf({ REFETTLE_HOME: ${JSON.stringify(home.folder)} }), { ...${JSON.stringify(header())}, pid: process.pid });
for (let step = 0; ; step += 1) {
  journal.record({ kind: 'note', stepId: 'step-' + step, title: 'A remark', startedAt: '${at(1)}', endedAt: '${at(2)}', text: 'x'.repeat(step) });
  process.stdout.write(step + '\\n');
}`,
    );
    const child = spawn(process.execPath, ['--import', 'tsx', program], {
      cwd: new URL('../../..', import.meta.url),
      stdio: ['ignore', 'pipe', 'inherit'],
    });
    let said = '';
    await new Promise<void>((done) => {
      child.stdout.on('data', (chunk: Buffer) => {
        said += chunk.toString();
        if (said.split('\n').length > 40) child.kill('SIGKILL');
      });
      child.once('close', () => done());
    });
    const lastSaid = Number(said.slice(0, said.lastIndexOf('\n')).split('\n').at(-1));
    expect(lastSaid).toBeGreaterThan(30);
    const results = read()?.results ?? [];
    expect(results.slice(0, lastSaid + 1).map(({ stepId }) => stepId)).toEqual(
      Array.from({ length: lastSaid + 1 }, (_, step) => `step-${step}`),
    );
  });
});
