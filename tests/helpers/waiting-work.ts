// Work of a bench that waits for the network, and whether the server has it: each thing once.
import { expect } from 'vitest';
import { keepEntry, type OutboxEntry } from '../../cli/journal/outbox.js';
import { newCapture, newInspection, newReading, newRepair, newRun, pass, passDeadTests, takeIn } from './factories.js';
import type { BenchTerminal } from './bench-terminal.js';
import type { SignedInPerson, TestServer } from './test-server.js';

/** A unit's work without network, written down on the bench: two readings, an inspection, a capture, a run and a repair. */
export async function workWithoutNetwork(server: TestServer, bench: BenchTerminal, person: SignedInPerson): Promise<OutboxEntry[]> {
  const { number } = await takeIn(server);
  await passDeadTests(server, number);
  const { id, name, role } = person;
  const entry = (route: OutboxEntry['route'], body: { id: string }): OutboxEntry => {
    const madeAt = server.time.now.toISOString();
    pass(server, 1);
    const about = { id: body.id, madeAt, server: bench.context.server, by: { id, name, role }, what: `${route} on ${String(number)}` };
    return { ...about, route, body, params: { number } } as OutboxEntry;
  };
  const run = newRun(server, 'h6-find');
  const entries = [entry('recordRun', run)];
  pass(server, run.steps.length + 1);
  entries.push(entry('recordInspection', newInspection(server)));
  entries.push(entry('recordReading', newReading(server, 'protective-conductor')));
  entries.push(entry('recordReading', newReading(server, 'insulation')));
  entries.push(entry('recordCapture', newCapture(server)));
  entries.push(entry('recordRepair', newRepair(server)));
  for (const one of entries) keepEntry(bench.context.home, one);
  return entries;
}

/** Each of these is on the books exactly once, and nothing besides them and what was there before. */
export async function expectStoredOnce(server: TestServer, entries: readonly OutboxEntry[]): Promise<void> {
  const as = server.people.lead;
  const numbers = new Set(entries.flatMap((entry) => ('params' in entry ? [entry.params.number] : [])));
  for (const number of numbers) {
    const mine = entries.filter((entry) => 'params' in entry && entry.params.number === number);
    const { runs, events } = await server.ok('getUnit', { params: { number }, as });
    const idsOf = (route: OutboxEntry['route']): string[] => mine.filter((one) => one.route === route).map(({ id }) => id);
    expect(runs.map(({ id }) => id)).toEqual(idsOf('recordRun'));
    // What a run left carries its id; the dead tests of before were sent by the test itself: one inspection, two readings.
    const alone = events.filter((event) => event.runId === undefined);
    const count = (kind: string): number => alone.filter((event) => event.kind === kind).length;
    expect(count('reading')).toBe(2 + idsOf('recordReading').length);
    expect(count('inspection')).toBe(1 + idsOf('recordInspection').length);
    expect(count('repair')).toBe(idsOf('recordRepair').length);
    expect(alone.flatMap((event) => (event.kind === 'capture' ? [event.capture.captureId] : []))).toEqual(idsOf('recordCapture'));
    for (const one of mine) {
      if (one.route === 'recordRun') expect(events.filter((event) => event.runId === one.id && event.kind === 'run ended')).toHaveLength(1);
      if (one.route !== 'recordCapture') continue;
      expect((await server.ok('getCapture', { params: { id: one.id }, as })).file).toBe(one.body.file);
    }
  }
}
