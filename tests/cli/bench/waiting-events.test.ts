// What a bench knows beside the server: the gates must see every repair and fail of it, and never a pass that proves nothing.
import { afterEach, beforeEach, expect, test } from 'vitest';
import { eventsOfWaiting } from '../../../cli/bench/waiting-events.js';
import { withRun } from '../../../cli/bench/with-run.js';
import { keepEntry, type OutboxEntry } from '../../../cli/journal/outbox.js';
import type { UnitEvent } from '../../../shared/history/events.js';
import { energisingGate } from '../../../shared/readiness/gates.js';
import type { StepResult } from '../../../shared/script/run-log.js';
import type { Sheet } from '../../../shared/sheet/schema.js';
import { readingBody } from '../../helpers/bench-log.js';
import { benchTerminal, type BenchTerminal } from '../../helpers/bench-terminal.js';
import { PARKED_RUN, parkRun, wholeRun } from '../../helpers/parked-run.js';
import { facts, heron, wil } from '../../helpers/unit-facts.js';

let bench: BenchTerminal;
beforeEach(() => (bench = benchTerminal()));
afterEach(() => bench.remove());

const DEAD_TESTS = ['visual', 'protective-conductor', 'insulation', 'discharge'];
/** The dead tests of a run that began at 09:00, each 20 s long. */
const deadTestsOf = (values: Record<string, number> = {}): StepResult[] =>
  wholeRun({ values }).steps.filter(({ stepId }) => DEAD_TESTS.includes(stepId));

const intake: UnitEvent = {
  id: 'in',
  at: '2026-03-03T08:00:00Z',
  by: wil,
  simulated: false,
  kind: 'intake',
  complaint: 'stands full of water',
};
const about = (id: string, madeAt: string) => ({
  id,
  madeAt,
  server: bench.context.server,
  by: wil,
  what: `work ${id}`,
  params: { number: 412 },
});
const repairAt = (at: string): OutboxEntry => {
  const id = '019af7a0-0000-7000-8000-00000000a001';
  const repair = { part: 'Drain pump', partSource: { kind: 'new' as const }, minutes: 30, costMinor: 2450 };
  return { ...about(id, at), route: 'recordRepair', body: { id, at, simulated: false, repair } };
};
/** A run that was closed and waits to be sent. */
const runEndedAt = (endedAt: string, steps: StepResult[]): OutboxEntry => {
  const body = { ...wholeRun(), endedAt, interrupted: true, steps };
  return { ...about(PARKED_RUN, endedAt), route: 'recordRun', body };
};
const parkedRun = (steps: StepResult[]): void => parkRun(bench.context, steps);
const waiting = (sheet: Sheet = heron): UnitEvent[] => eventsOfWaiting(bench.context, 412, sheet);
const gate = () => energisingGate(facts(withRun([intake], waiting())), { rigSimulated: false });

test('When dead tests wait on the bench with nothing after them, then they open the gate', () => {
  parkedRun(deadTestsOf());
  expect(gate()).toEqual({ open: true, reasons: [] });
});

test('When a repair waits in the outbox and a parked run did its dead tests before it, then they say nothing about the mended machine', () => {
  parkedRun(deadTestsOf());
  keepEntry(bench.context.home, repairAt('2026-03-03T10:00:00Z'));
  expect(gate().reasons).toEqual(['visual check is not done', 'protective conductor is not done', 'insulation is not done']);
});

test('When a run was closed after a repair and did its dead tests before it, then they say nothing about the mended machine', () => {
  keepEntry(bench.context.home, repairAt('2026-03-03T10:00:00Z'));
  keepEntry(bench.context.home, runEndedAt('2026-03-03T10:30:00Z', deadTestsOf()));
  expect(gate().open).toBe(false);
});

test('When the dead tests were done after the repair that waits, then they open the gate', () => {
  keepEntry(bench.context.home, repairAt('2026-03-03T08:30:00Z'));
  keepEntry(bench.context.home, runEndedAt('2026-03-03T10:30:00Z', deadTestsOf()));
  expect(gate().open).toBe(true);
});

test('When the server refused a repair, then the machine was opened all the same: the gate is shut, and that is said', () => {
  const refused = { at: '2026-03-03T10:01:00Z', status: 422, reason: 'no such part', remedy: 'say which' };
  keepEntry(bench.context.home, runEndedAt('2026-03-03T09:30:00Z', deadTestsOf()));
  keepEntry(bench.context.home, { ...repairAt('2026-03-03T10:00:00Z'), refused });
  expect(gate().open).toBe(false);
  expect(bench.stderr()).toContain('the server refused it');
  expect(bench.stderr()).toContain('What was mended or failed in it counts all the same');
});

test('When the server refused a run, then its passes open nothing and its fail shuts', () => {
  const refused = { at: '2026-03-03T10:01:00Z', status: 422, reason: 'sold', remedy: 'give it up' };
  keepEntry(bench.context.home, { ...runEndedAt('2026-03-03T09:30:00Z', deadTestsOf()), refused });
  expect(gate().open).toBe(false);
  keepEntry(bench.context.home, { ...runEndedAt('2026-03-03T09:30:00Z', deadTestsOf({ insulation: 0.2 })), refused });
  // 0.2 megohm where the sheet asks for at least 1.
  expect(gate().reasons).toContain('insulation: fail');
});

test('When the newest sheet lacks a check of a run, then its failed insulation and its repair still shut, and its passes open nothing', () => {
  const [failed] = deadTestsOf({ insulation: 0.2 }).filter(({ stepId }) => stepId === 'insulation');
  const gone: StepResult = {
    kind: 'measure',
    stepId: 'heater',
    title: 'Heater',
    startedAt: '2026-03-03T09:05:00Z',
    endedAt: '2026-03-03T09:05:20Z',
    reading: readingBody('heater'),
  };
  const withoutHeater: Sheet = { ...heron, checks: heron.checks.filter(({ id }) => id !== 'heater') };
  if (!failed) throw new Error('the script tests the insulation');
  parkedRun([...deadTestsOf().slice(0, 2), failed, gone]);
  expect(waiting(withoutHeater)).toMatchObject([{ kind: 'reading', reading: { checkId: 'insulation', judgement: { verdict: 'fail' } } }]);
  expect(bench.stderr()).toContain('can’t judge it');
});
