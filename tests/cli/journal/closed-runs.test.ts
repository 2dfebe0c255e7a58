import { existsSync, mkdirSync, renameSync } from 'node:fs';
import { createServer, type Server } from 'node:http';
import type { AddressInfo } from 'node:net';
import { afterEach, beforeEach, describe, expect, test } from 'vitest';
import { runAbandon } from '../../../cli/commands/abandon.js';
import { runResume } from '../../../cli/commands/resume.js';
import { closeEnded, closeRun } from '../../../cli/journal/open-runs.js';
import { putAway, waitingEntries } from '../../../cli/journal/outbox.js';
import { journalFileOf, RunJournal, writtenRun } from '../../../cli/journal/run-journal.js';
import type { StepResult } from '../../../shared/script/run-log.js';
import { benchTerminal, signedIn, type BenchTerminal } from '../../helpers/bench-terminal.js';
import { offlineBench } from '../../helpers/offline-bench.js';
import { wil } from '../../helpers/unit-facts.js';

const RUN = '019af7a0-0000-7000-8000-000000000001';
const at = (second: number): string => new Date(Date.UTC(2026, 2, 5, 9, 0, second)).toISOString();
const looked = (verdict: 'pass' | 'fail'): StepResult => ({
  kind: 'inspect',
  stepId: 'visual',
  title: 'Visual check',
  startedAt: at(3),
  endedAt: at(4),
  inspection: { checkId: 'visual', title: 'Visual check', deadTest: 'visual', verdict },
});

/** Something that takes whatever comes: what is looked at here is what the bench does, not what the server stores. */
let server: Server;
let keys: unknown[];
let bench: BenchTerminal;

beforeEach(async () => {
  keys = [];
  server = createServer((request, response) => {
    keys.push(request.headers['idempotency-key']);
    request
      .resume()
      .on('end', () => response.writeHead(201, { 'content-type': 'application/json' }).end(JSON.stringify({ id: RUN, verdict: 'pass' })));
  });
  await new Promise<void>((ready) => server.listen(0, '127.0.0.1', ready));
  begin(`http://127.0.0.1:${String((server.address() as AddressInfo).port)}`);
});
afterEach(async () => {
  bench.remove();
  server.closeAllConnections();
  await new Promise((closed) => server.close(closed));
});

function begin(address: string): void {
  bench = benchTerminal({ env: { REFETTLE_SERVER: address } });
  signedIn(bench, { ...wil, role: 'technician', email: 'wil@millrace.example', token: 'secret' });
}

/** The journal of a run on No. 0412 that has come to its end. */
function ended(verdict: 'pass' | 'fail' = 'pass'): void {
  const journal = begun(verdict);
  journal.end(at(5), false);
  journal.close();
}

/** One that has done its first step. */
function begun(verdict: 'pass' | 'fail' = 'pass'): RunJournal {
  const { home, server: address } = bench.context;
  const journal = RunJournal.create(home, {
    id: RUN,
    server: address,
    unit: 412,
    by: wil,
    script: { name: 'h6-find', title: 'Find the fault', prove: false, text: 'format: refettle.script' },
    rig: { name: 'bench 2', simulated: true },
    startedAt: at(0),
    pid: process.pid,
  });
  journal.record(looked(verdict));
  return journal;
}

/** How far the program came before it was killed. */
const KILLED: { where: string; state: () => void; asked: number }[] = [
  { where: 'after the last line of the journal', state: () => ended(), asked: 1 },
  {
    where: 'between the message and the journal’s move',
    state: () => {
      ended();
      const { home } = bench.context;
      closeRun(bench.context, writtenRun(home, RUN));
      mkdirSync(home.path('journal'), { recursive: true });
      renameSync(home.path('journal', 'closed', `${RUN}.ndjson`), journalFileOf(home, RUN));
    },
    asked: 1,
  },
  {
    where: 'before the message was sent',
    state: () => {
      ended();
      closeRun(bench.context, writtenRun(bench.context.home, RUN));
    },
    asked: 1,
  },
  {
    where: 'after the server had answered',
    state: () => {
      ended();
      closeRun(bench.context, writtenRun(bench.context.home, RUN));
      putAway(bench.context.home, RUN, 'sent');
    },
    asked: 0,
  },
  {
    where: 'between the message and the journal’s move, and another terminal sent it since',
    state: () => {
      ended();
      const { home } = bench.context;
      closeRun(bench.context, writtenRun(home, RUN));
      putAway(home, RUN, 'sent');
      renameSync(home.path('journal', 'closed', `${RUN}.ndjson`), journalFileOf(home, RUN));
    },
    asked: 0,
  },
];

describe('A run that lost a capture’s file', () => {
  const CAPTURE = '019af7a0-0000-7000-8000-0000000000c1';
  const step = (stepId: string) => ({ stepId, title: stepId, startedAt: at(4), endedAt: at(5) });

  test('When it is abandoned, then it is closed without that capture, says so, and what the bench had seen', async () => {
    bench.remove();
    bench = offlineBench();
    const journal = begun();
    journal.record({ ...step('lamps'), kind: 'cut', captureId: CAPTURE, file: '' });
    journal.record({ ...step('lamps'), kind: 'capture', captureId: CAPTURE, file: '', fromFile: false });
    journal.record({ ...step('code'), kind: 'expect', captureId: CAPTURE, expected: 'no code', seen: 'G5K3', verdict: 'fail' });
    journal.close();
    expect(await runAbandon({ run: RUN, reason: 'the disk was mended' }, bench.context)).toBe(5);
    expect(bench.stderr()).toContain(`The capture of step 'lamps' is gone (${bench.context.home.path('captures', CAPTURE)}`);
    expect(waitingEntries(bench.context.home).entries[0]?.body).toMatchObject({
      interrupted: true,
      steps: [
        { kind: 'inspect' },
        { kind: 'skipped', stepId: 'lamps', stepKind: 'capture', judged: true },
        { kind: 'skipped', stepId: 'code', reason: expect.stringContaining('it had shown: G5K3') as string },
      ],
      // Who left it came after three steps of this log.
      people: [{ how: 'began' }, { how: 'abandoned', steps: 3 }],
    });
    expect(existsSync(journalFileOf(bench.context.home, RUN))).toBe(false);
  });
});

describe('A run that had ended when the program was killed', () => {
  for (const { where, state, asked } of KILLED) {
    test(`When it was killed ${where}, then resuming sends what waits once and says the run’s verdict`, async () => {
      state();
      expect(await runResume({ run: RUN, unattended: true }, bench.context)).toBe(0);
      expect(keys).toEqual(Array<string>(asked).fill(RUN));
      expect(bench.stdout()).toBe('bench run h6-find on No. 0412: pass. It is sent.\n');
      expect(bench.stderr()).toContain('has ended and is closed');
      expect(waitingEntries(bench.context.home).entries).toEqual([]);
      expect(existsSync(journalFileOf(bench.context.home, RUN))).toBe(false);
      expect(existsSync(bench.context.home.path('journal', 'closed', `${RUN}.ndjson`))).toBe(true);
    });
  }

  test('When no run is named, or its unit is, then the one that had just ended is meant', async () => {
    ended();
    expect(await runResume({ run: '412' }, bench.context)).toBe(0);
    bench.remove();
    begin(bench.context.server);
    ended();
    expect(await runResume({}, bench.context)).toBe(0);
    expect(keys).toEqual([RUN, RUN]);
  });

  test('When its verdict is a fail, then resuming exits 1, and as JSON says what a run says', async () => {
    ended('fail');
    expect(await runResume({ run: RUN, json: true }, bench.context)).toBe(1);
    expect(JSON.parse(bench.stdout())).toEqual({
      run: RUN,
      unit: 412,
      script: 'h6-find',
      verdict: 'fail',
      sent: true,
      steps: [{ id: 'visual', kind: 'inspect', title: 'Visual check', verdict: 'fail' }],
    });
  });

  test('When the server is away, then resuming says that it waits and exits 5', async () => {
    const { server: address } = bench.context;
    ended();
    await new Promise((closed) => server.close(closed));
    expect(await runResume({ run: RUN }, bench.context)).toBe(5);
    expect(bench.stderr()).toContain(address);
    expect(bench.stdout()).toBe('bench run h6-find on No. 0412: pass. It is not sent.\n');
    expect(waitingEntries(bench.context.home).entries.map(({ id }) => id)).toEqual([RUN]);
  });

  test('When two terminals find it at the same moment, then one of them closes it', async () => {
    ended();
    const closed = await Promise.all([closeEnded(bench.context), closeEnded(bench.context)]);
    expect(closed.flat().map(({ id }) => id)).toEqual([RUN]);
  });

  test('When somebody wants to abandon it, then it is refused, kept and sent as it is', async () => {
    ended();
    expect(await runAbandon({ run: RUN, reason: 'mistaken' }, bench.context)).toBe(1);
    expect(bench.stderr()).toContain('can’t be abandoned');
    expect(waitingEntries(bench.context.home).entries.map(({ id }) => id)).toEqual([RUN]);
  });

  test('When the id is of no run of this bench, then it is a wrong use', async () => {
    ended();
    await expect(runResume({ run: '019af7a0-0000-7000-8000-0000000000ff' }, bench.context)).rejects.toThrow('has no open run');
    await expect(runResume({ run: '../../token' }, bench.context)).rejects.toThrow('has no open run');
  });
});
