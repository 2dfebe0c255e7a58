import { spawn } from 'node:child_process';
import { appendFileSync, existsSync, mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterEach, beforeEach, describe, expect, test } from 'vitest';
import { homeOf, type Home } from '../../../cli/home.js';
import { CaptureFile } from '../../../cli/journal/capture-file.js';
import { waitingEntries } from '../../../cli/journal/outbox.js';
import { closeEnded, openRuns, runLock } from '../../../cli/journal/open-runs.js';
import { takeLock } from '../../../cli/journal/lock.js';
import { checkedLine, checksumOf, readCheckedLines } from '../../../cli/journal/checked-lines.js';
import { cutOf, journalFileOf, logOf, readRunJournal, RunJournal, type RunHeader } from '../../../cli/journal/run-journal.js';
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
    const journal = RunJournal.create(home, header());
    journal.begin({ stepId: 'isolate', kind: 'caution', title: 'Isolate', at: at(1) });
    journal.record(caution);
    expect(read()).toMatchObject({ results: [caution], begun: undefined, end: undefined });
    journal.begin({ stepId: 'visual', kind: 'inspect', title: 'Visual check', at: at(3) });
    expect(read()).toMatchObject({ results: [caution], begun: { stepId: 'visual' } });
    journal.close();
  });

  test('When the last line was torn by a power cut, then everything before it is read', () => {
    const journal = RunJournal.create(home, header());
    journal.record(caution);
    journal.record(looked);
    journal.close();
    const text = readFileSync(journalFileOf(home, RUN), 'utf8');
    // Shorter than the last line by anything from one character on.
    for (let cut = 1; cut < JSON.stringify({ step: looked }).length; cut += 7) {
      expect(readRunJournal(text.slice(0, -1 - cut))?.results).toEqual([caution]);
    }
    expect(readRunJournal(text.slice(0, -1))?.results).toEqual([caution, looked]);
  });

  test('When a run was broken off while it recorded lamps, then those lamps are a cut that can be kept, and nothing else is said to be done', () => {
    const journal = RunJournal.create(home, header());
    journal.record(caution);
    journal.begin({ stepId: 'lamps', kind: 'capture', title: 'The lamps', at: at(5), captureId: CAPTURE });
    const capture = startCapture();
    appendFileSync(capture.path, '[20000,1,2');
    const written = read();
    if (!written) throw new Error('the journal was not read');
    const kept = cutOf(home, written);
    expect(kept).toMatchObject({ kind: 'cut', stepId: 'lamps', captureId: CAPTURE, startedAt: at(5) });
    expect(kept?.kind === 'cut' && kept.file.trimEnd().split('\n')).toHaveLength(3);
    const log = logOf(home, written);
    expect(log).toMatchObject({ interrupted: true, endedAt: at(5), steps: [caution] });
    expect(runVerdict(log.steps, log.interrupted)).toBe('not done');
    journal.close();
    capture.keep();
  });

  test('When a captured step was recorded, then its file stands in the log, whole, and not in the journal', () => {
    const journal = RunJournal.create(home, header());
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

describe('A line of the journal', () => {
  test('When its checksum is taken, then it is the published one', () => {
    // CRC-32/ISO-HDLC: the check value for the nine digits is cbf43926 (catalogue of parametrised CRC algorithms; ITU-T V.42, zlib).
    expect(checksumOf('123456789')).toBe('cbf43926');
  });

  test('When any one character of it is another, then the line does not hold together', () => {
    const line = checkedLine(1, { step: caution });
    for (let place = 0; place < line.length - 1; place += 1) {
      const other = line[place] === 'x' ? 'y' : 'x';
      expect(readCheckedLines(`${line.slice(0, place)}${other}${line.slice(place + 1)}`)).toMatchObject([
        { wrong: expect.any(String) as string },
      ]);
    }
  });

  test('When a line is missing, stands twice or in another place, then that is seen', () => {
    const lines = [1, 2, 3].map((number) => checkedLine(number, { number }));
    const wrong = (order: number[]): number | undefined =>
      readCheckedLines(order.map((index) => lines[index]).join('')).find((line) => 'wrong' in line)?.number;
    expect([wrong([0, 1, 2]), wrong([0, 2]), wrong([0, 1, 1, 2]), wrong([1, 0, 2])]).toEqual([undefined, 2, 3, 1]);
  });

  test('When a journal is from before there were checksums, then it is read as it was', () => {
    const text = [{ run: header() }, { step: caution }].map((line) => `${JSON.stringify(line)}\n`).join('');
    expect(readRunJournal(text)).toMatchObject({ results: [caution], damage: undefined, torn: false });
  });
});

describe('A journal that is damaged', () => {
  const threeSteps = (): string[] => {
    const journal = RunJournal.create(home, header());
    journal.record(caution);
    journal.record(looked);
    journal.close();
    return readFileSync(journalFileOf(home, RUN), 'utf8').split('\n');
  };

  test('When a line in the middle is damaged, then it is named, and nothing behind it is taken for done', () => {
    const lines = threeSteps();
    writeFileSync(journalFileOf(home, RUN), [lines[0], lines[1]?.replace('yes', 'no'), ...lines.slice(2)].join('\n'));
    expect(read()).toMatchObject({ results: [], damage: { line: 2, reason: 'its checksum is wrong', behind: 1 } });
  });

  test('When somebody goes on with it, then the damage is noted, what was damaged stays, and what comes now counts', () => {
    const lines = threeSteps();
    const damaged = [lines[0], lines[1]?.replace('yes', 'no'), ...lines.slice(2)].join('\n');
    writeFileSync(journalFileOf(home, RUN), damaged);
    const before = read();
    if (!before) throw new Error('the journal was not read');
    const journal = RunJournal.goOn(home, before);
    journal.record(caution);
    journal.close();
    expect(readFileSync(journalFileOf(home, RUN), 'utf8').startsWith(damaged)).toBe(true);
    expect(read()).toMatchObject({ results: [caution], damage: undefined });
  });

  test('When whole results stand behind the damage, then they travel in the log with it, also after somebody went on', () => {
    const lines = threeSteps();
    writeFileSync(journalFileOf(home, RUN), [lines[0], lines[1]?.replace('yes', 'no'), ...lines.slice(2)].join('\n'));
    const damages = [{ line: 2, reason: 'its checksum is wrong', steps: 0, found: [looked] }];
    const before = read();
    expect(before && logOf(home, before)).toMatchObject({ steps: [], damages, endedAt: looked.endedAt });
    if (!before) throw new Error('the journal was not read');
    const journal = RunJournal.goOn(home, before);
    journal.record(caution);
    journal.close();
    const after = read();
    expect(after && logOf(home, after)).toMatchObject({ steps: [caution], damages });
  });

  test('When a line is missing, then those behind it are evidence, too; what stands twice is no second result', () => {
    const lines = threeSteps();
    writeFileSync(journalFileOf(home, RUN), [lines[0], ...lines.slice(2)].join('\n'));
    expect(read()).toMatchObject({ results: [], damage: { line: 2, behind: 1, found: [looked] } });
    writeFileSync(journalFileOf(home, RUN), [lines[0], lines[1], lines[1], ...lines.slice(2)].join('\n'));
    expect(read()).toMatchObject({ results: [caution], damage: { line: 3, found: [looked] } });
  });

  test('When its last line was torn and somebody goes on, then the torn line stays where it is and what comes now counts', () => {
    const text = threeSteps().join('\n');
    for (let cut = 1; cut < 200; cut += 9) {
      writeFileSync(journalFileOf(home, RUN), text.slice(0, -1 - cut));
      const before = read();
      expect(before).toMatchObject({ results: [caution], torn: true });
      if (!before) throw new Error('the journal was not read');
      const journal = RunJournal.goOn(home, before);
      journal.record(looked);
      journal.close();
      expect(read()).toMatchObject({ results: [caution, looked], torn: false, damage: undefined });
    }
  });

  test('When the power went and left zeros behind the last line, then they are passed over', () => {
    const text = threeSteps().join('\n');
    expect(readRunJournal(`${text}${'\0'.repeat(300)}`)).toMatchObject({ results: [caution, looked], torn: true, damage: undefined });
  });

  test('When its first line is damaged, then it can’t be said which run it was, and the file is named and left', () => {
    const lines = threeSteps();
    writeFileSync(journalFileOf(home, RUN), ['x', ...lines.slice(1)].join('\n'));
    const bench = benchTerminal({ home: home.folder });
    expect(openRuns(bench.context)).toEqual({ runs: [], unreadable: [journalFileOf(home, RUN)] });
  });
});

describe('Runs that were broken off', () => {
  test('When the program that ran it is gone, then the run stays open and says how far it came', async () => {
    const journal = RunJournal.create(home, header(GONE));
    journal.record(caution);
    journal.close();
    const bench = benchTerminal({ home: home.folder });
    expect(openRuns(bench.context).runs).toMatchObject([{ state: 'broken off', done: 1, owner: undefined }]);
    expect(await closeEnded(bench.context)).toEqual([]);
    expect(existsSync(journalFileOf(home, RUN))).toBe(true);
  });

  test('When it was killed after its end and before it was a message, then it is made into one, once, with the run as its key', async () => {
    const journal = RunJournal.create(home, header(GONE));
    journal.record(caution);
    journal.end(at(3), false);
    journal.close();
    const bench = benchTerminal({ home: home.folder });
    expect((await closeEnded(bench.context)).map(({ id }) => id)).toEqual([RUN]);
    expect(waitingEntries(home).entries).toMatchObject([
      {
        id: RUN,
        route: 'recordRun',
        params: { number: 412 },
        body: { interrupted: false, steps: [caution], people: [{ person: wil, how: 'began' }] },
      },
    ]);
    expect(existsSync(journalFileOf(home, RUN))).toBe(false);
    expect(await closeEnded(bench.context)).toEqual([]);
  });

  test('When the program that runs it is alive, then it is going, and left alone', async () => {
    const journal = RunJournal.create(home, header());
    journal.end(at(3), false);
    journal.close();
    const bench = benchTerminal({ home: home.folder });
    const lock = await takeLock(bench.context, runLock(RUN), { what: 'bench run', run: RUN });
    expect(openRuns(bench.context).runs).toMatchObject([{ state: 'going', owner: { pid: process.pid } }]);
    expect(await closeEnded(bench.context)).toEqual([]);
    if ('release' in lock) lock.release();
    expect(await closeEnded(bench.context)).toHaveLength(1);
  });

  test('When the program is killed in the middle, then every step that was said to be done is in the file', async () => {
    const program = join(home.folder, 'writer.mts');
    const from = (path: string): string => JSON.stringify(new URL(`../../../${path}`, import.meta.url).href);
    writeFileSync(
      program,
      `import { homeOf } from ${from('cli/home.ts')};
import { RunJournal } from ${from('cli/journal/run-journal.ts')};
const journal = RunJournal.create(homeOf({ REFETTLE_HOME: ${JSON.stringify(home.folder)} }), { ...${JSON.stringify(header())}, pid: process.pid });
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
