// Journals and scripts that were mangled at random: each gives a clear refusal or a correct partial reading, never a crash or a wrong "done".
import { mkdtempSync, readFileSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, beforeAll, expect, test } from 'vitest';
import { homeOf, type Home } from '../../../cli/home.js';
import { readScript } from '../../../cli/bench/read-script.js';
import { journalFileOf, readRunJournal, RunJournal } from '../../../cli/journal/run-journal.js';
import { BadInputError } from '../../../shared/errors.js';
import { checkScript } from '../../../shared/script/check-script.js';
import type { StepResult } from '../../../shared/script/run-log.js';
import { benchLog } from '../../helpers/bench-log.js';
import { faults } from '../../helpers/faults.js';
import { heron, shopScript, wil } from '../../helpers/unit-facts.js';

let home: Home;
let whole: string;
let done: string[];
beforeAll(() => {
  home = homeOf({ REFETTLE_HOME: mkdtempSync(join(tmpdir(), 'refettle-mangled-')) });
  const id = '019af7a0-0000-7000-8000-000000000001';
  const log = benchLog({ id, script: shopScript('h6-prove'), scriptText: scriptText(), startedAt: '2026-03-05T09:00:00Z' });
  const { script, rig, startedAt } = log;
  const journal = RunJournal.create(home, {
    id,
    server: 'http://127.0.0.1:4780',
    unit: 412,
    by: wil,
    script,
    rig,
    startedAt,
    pid: process.pid,
  });
  for (const step of log.steps) {
    journal.begin({ stepId: step.stepId, kind: step.kind, title: step.title, at: step.startedAt });
    journal.record(step);
  }
  journal.end(log.endedAt, false);
  journal.close();
  whole = readFileSync(journalFileOf(home, id), 'utf8');
  done = (readRunJournal(whole)?.results ?? []).map(written);
  expect(done).toHaveLength(20);
});
afterAll(() => rmSync(home.folder, { recursive: true, force: true }));

const scriptText = (): string => readFileSync(new URL('../../../server/seed/shop/h6-prove.yaml', import.meta.url), 'utf8');
const written = (result: StepResult): string => JSON.stringify(result);

/** One thing after another that happens to files: cut, bytes changed, lines gone, doubled or swapped, zeros, something put in. */
function mangled(text: string, below: (limit: number) => number): string {
  const at = below(text.length);
  const lines = text.split('\n');
  const [one, other] = [below(lines.length), below(lines.length)];
  switch (below(8)) {
    case 0:
      return text.slice(0, at);
    case 1:
      return `${text.slice(0, at)}${String.fromCharCode(32 + below(95))}${text.slice(at + 1)}`;
    case 2:
      return lines.filter((_, index) => index !== one).join('\n');
    case 3:
      return [...lines.slice(0, one), lines[one], ...lines.slice(one)].join('\n');
    case 4:
      return lines.map((line, index) => (index === one ? lines[other] : index === other ? lines[one] : line)).join('\n');
    case 5:
      return `${text.slice(0, at)}${'\0'.repeat(1 + below(4096))}`;
    case 6:
      return `${text.slice(0, at)}${text.slice(at + 1 + below(200))}`;
    default:
      return `${text.slice(0, at)}\n${text.slice(below(text.length), at + 50)}${text.slice(at)}`;
  }
}

test('When a journal is mangled, then what is read of it is what was done first, and anything else is said', { timeout: 300_000 }, () => {
  const { count, below } = faults('mangled journals', 300);
  const outcomes = { unreadable: 0, whole: 0, partial: 0 };
  for (let round = 0; round < count; round += 1) {
    let text = mangled(whole, below);
    if (below(3) === 0) text = mangled(text, below);
    const read = readRunJournal(text);
    if (!read) {
      outcomes.unreadable += 1;
      // Only where its first line is no longer what it was.
      expect(text.split('\n')[0]).not.toBe(whole.split('\n')[0]);
      continue;
    }
    const results = read.results.map(written);
    expect(results).toEqual(done.slice(0, results.length));
    const complete = read.end !== undefined && read.damage === undefined;
    if (complete) expect(results).toHaveLength(done.length);
    if (text !== whole && !text.startsWith(whole) && complete) expect(whole.trimEnd()).toBe(text.trimEnd());
    // What is missing is missing at the end of the file, or it is named.
    if (!complete && read.damage === undefined) expect(whole.startsWith(text.slice(0, text.lastIndexOf('\n') + 1))).toBe(true);
    outcomes[complete ? 'whole' : 'partial'] += 1;
  }
  process.stdout.write(`of ${String(count)}: ${JSON.stringify(outcomes)}\n`);
});

test(
  'When a script is mangled, then it is refused with words, or it is a script that holds together by itself',
  { timeout: 300_000 },
  () => {
    const { count, below } = faults('mangled scripts', 100);
    const text = scriptText();
    let refused = 0;
    for (let round = 0; round < count; round += 1) {
      try {
        // What can still be read must at least be looked through without a crash: findings keep it from being run.
        checkScript(readScript(mangled(text, below), 'a script'), heron);
      } catch (error) {
        expect(error).toBeInstanceOf(BadInputError);
        expect((error as Error).message.length).toBeGreaterThan(10);
        refused += 1;
      }
    }
    expect(refused).toBeGreaterThan(count / 10);
  },
);
