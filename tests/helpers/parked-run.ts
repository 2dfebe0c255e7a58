// A run of h6-find on No. 0412 that is left on a bench: Wil Tarrow began it at 09:00, and these steps have a result.
import { readFileSync } from 'node:fs';
import type { Context } from '../../cli/context.js';
import { RunJournal } from '../../cli/journal/run-journal.js';
import type { StepResult } from '../../shared/script/run-log.js';
import { benchLog, type BenchLogOptions } from './bench-log.js';
import { shopScript, wil } from './unit-facts.js';

export const PARKED_RUN = '019af7a0-0000-7000-8000-00000000a100';
const script = shopScript('h6-find');
const scriptText = readFileSync(new URL('../../server/seed/shop/h6-find.yaml', import.meta.url), 'utf8');
const startedAt = '2026-03-03T09:00:00Z';

/** The log of that run gone through to its end, each step 20 s long. */
export const wholeRun = (plan: Partial<BenchLogOptions> = {}) => benchLog({ id: PARKED_RUN, script, scriptText, startedAt, ...plan });

export function parkRun({ home, server }: Context, steps: readonly StepResult[], rig = { name: 'bench-2', simulated: false }): void {
  const journal = RunJournal.create(home, {
    id: PARKED_RUN,
    server,
    unit: 412,
    by: wil,
    script: { name: script.name, title: script.title, prove: script.prove, text: scriptText },
    rig,
    startedAt,
    pid: process.pid,
  });
  steps.forEach((step) => journal.record(step));
  journal.close();
}
