// What waits is sent in order, with longer and longer waits, and never lost. The server here answers as it is told.
import { createServer, type Server } from 'node:http';
import type { AddressInfo } from 'node:net';
import { afterEach, beforeEach, describe, expect, test } from 'vitest';
import { runSync } from '../../../cli/commands/sync.js';
import { keepAndSend, sendWaiting, SENDER_LOCK } from '../../../cli/journal/deliver.js';
import { takeLock } from '../../../cli/journal/lock.js';
import { keepEntry, type OutboxEntry } from '../../../cli/journal/outbox.js';
import { backOffMs, triesOf } from '../../../cli/journal/tries.js';
import type { Context } from '../../../cli/context.js';
import { benchTerminal, signedIn, type BenchTerminal } from '../../helpers/bench-terminal.js';
import { wil } from '../../helpers/unit-facts.js';

interface Told {
  status: number;
  body?: unknown;
  headers?: Record<string, string>;
}
let answers: Told[];
let asked: string[];
let server: Server;
let address: string;
let bench: BenchTerminal;
let now: Date;
let context: Context;

beforeEach(async () => {
  answers = [];
  asked = [];
  now = new Date('2026-03-05T09:00:00.000Z');
  server = createServer((request, response) => {
    asked.push(`${request.headers['idempotency-key'] as string}`);
    const { status, body, headers } = answers.shift() ?? { status: 503 };
    request
      .resume()
      .on('end', () =>
        response
          .writeHead(status, { 'content-type': 'application/json', date: now.toUTCString(), ...headers })
          .end(JSON.stringify(body ?? { type: 'urn:refettle:problem:fault', title: 'Not now', status })),
      );
  });
  await new Promise<void>((ready) => server.listen(0, '127.0.0.1', ready));
  address = `http://127.0.0.1:${(server.address() as AddressInfo).port}`;
  bench = benchTerminal({ env: { REFETTLE_SERVER: address } });
  signedIn(bench, { ...wil, role: 'technician', email: 'wil@millrace.example', token: 'secret' });
  // Time is made up; a sleep passes it.
  context = {
    ...bench.context,
    now: () => now,
    sleep: (ms) => {
      now = new Date(now.getTime() + ms);
      return Promise.resolve();
    },
  };
});
afterEach(async () => {
  bench.remove();
  await new Promise((closed) => server.close(closed));
});

let count = 0;
function repair(unit = 412, at = new Date(Date.UTC(2026, 2, 5, 8, 0, (count += 1))).toISOString()): OutboxEntry {
  const id = `019af7a0-0000-7000-8000-${String((count += 1)).padStart(12, '0')}`;
  return {
    route: 'recordRepair',
    id,
    madeAt: at,
    server: address,
    by: wil,
    what: `repair of ${unit}`,
    params: { number: unit },
    body: { id, at, simulated: false, repair: { part: 'Drain pump', partSource: { kind: 'new' }, minutes: 30, costMinor: 2450 } },
  };
}
const stored = (entry: OutboxEntry): Told => ({
  status: 201,
  body: {
    event: { id: entry.id, at: entry.madeAt, by: wil, simulated: false, kind: 'repair', repair: (entry.body as { repair: object }).repair },
  },
});
const keep = (...entries: OutboxEntry[]): void => entries.forEach((entry) => keepEntry(context.home, entry));

describe('The back-off', () => {
  test('When it fails again and again, then the wait doubles up to five minutes, and half of it is chance', () => {
    const most = [1, 2, 3, 4, 8, 9, 50].map((tries) => backOffMs(tries, () => 1));
    expect(most).toEqual([2000, 4000, 8000, 16_000, 256_000, 300_000, 300_000]);
    expect([1, 50].map((tries) => backOffMs(tries, () => 0))).toEqual([1000, 150_000]);
  });
});

describe('The spool', () => {
  test('When the server names a time to come again, then nothing is asked before it, not even by a person', async () => {
    const entry = repair();
    keep(entry);
    answers.push({ status: 503, headers: { 'retry-after': '120' } });
    await sendWaiting(context, { random: () => 0 });
    now = new Date('2026-03-05T09:01:59.000Z');
    expect(await sendWaiting(context, { again: true })).toMatchObject([{ state: 'waits', nextAt: '2026-03-05T09:02:00.000Z' }]);
    expect(asked).toHaveLength(1);
    now = new Date('2026-03-05T09:02:00.000Z');
    answers.push(stored(entry));
    expect(await sendWaiting(context, { again: true })).toMatchObject([{ state: 'sent' }]);
    expect(triesOf(context.home, entry.id)).toBeUndefined();
  });

  test('When one thing of a unit waits, then what came after it on that unit waits behind it, and another unit goes on', async () => {
    const [first, second, other] = [repair(412), repair(412), repair(77)];
    // Its own clock was wrong: ten hours ahead.
    const ahead = { ...first, body: { ...first.body, at: '2026-03-05T19:00:00.000Z' } } as OutboxEntry;
    keep(ahead, second, other);
    answers.push({ status: 422, body: { type: 'urn:refettle:problem:invalid', title: 'Invalid', status: 422 } }, stored(other));
    const deliveries = await sendWaiting(context);
    expect(deliveries.map(({ state }) => state)).toEqual(['waits', 'waits', 'sent']);
    expect(asked).toEqual([first.id, other.id]);
  });

  test.each<[string, Told]>([
    ['fails at it each time', { status: 500 }],
    ['answers what can’t be read', { status: 200, body: 'hello' }],
  ])('When the server %s, then only that unit waits behind it, and after some tries it may be given up', async (_what, answer) => {
    const [first, second, other] = [repair(412), repair(412), repair(77)];
    keep(first, second, other);
    answers.push(answer, stored(other), answer);
    const deliveries = await sendWaiting(context);
    expect(deliveries.map(({ state }) => state)).toEqual(['waits', 'waits', 'sent']);
    expect(deliveries[1]).toMatchObject({ why: expect.stringContaining('what was recorded before it on this unit goes first') as string });
    await sendWaiting(context, { again: true });
    await expect(runSync({ drop: first.id }, context)).rejects.toThrow('only waiting');
    answers.push(answer);
    expect(await runSync({}, context)).toBe(5);
    expect(bench.stdout()).toContain(`To give it up: refettle sync --drop ${first.id}`);
    expect(await runSync({ drop: first.id }, context)).toBe(0);
    answers.push(stored(second));
    expect(await sendWaiting(context)).toMatchObject([{ state: 'sent', entry: { id: second.id } }]);
  });

  test('When nobody answers, then all the rest waits, and next time another unit goes first', async () => {
    const [first, other] = [repair(412), repair(77)];
    keep(first, other);
    answers.push({ status: 503 });
    expect((await sendWaiting(context)).map(({ state }) => state)).toEqual(['waits', 'waits']);
    answers.push(stored(other), { status: 503 });
    expect((await sendWaiting(context, { again: true })).map(({ state }) => state)).toEqual(['waits', 'sent']);
    expect(asked).toEqual([first.id, other.id, first.id]);
    await expect(runSync({ drop: first.id }, context)).rejects.toThrow('only waiting');
  });

  test('When one thing waits for whoever recorded it, then what came after it on that unit waits too', async () => {
    const tamsins = { ...repair(412), by: { id: 'tamsin', name: 'Tamsin Oake', role: 'technician' } } as OutboxEntry;
    const [second, other] = [repair(412), repair(77)];
    keep(tamsins, second, other);
    answers.push(stored(other));
    const deliveries = await sendWaiting(context);
    expect(deliveries.map(({ state }) => state)).toEqual(['waits', 'waits', 'sent']);
    expect(deliveries[1]).toMatchObject({ why: expect.stringContaining('Tamsin Oake recorded it') as string });
    expect(asked).toEqual([other.id]);
  });

  test('When a new thing is recorded, then another unit that did not get through waits for its time, and its own unit does not', async () => {
    const [mine, others] = [repair(412), repair(77)];
    keep(mine, others);
    answers.push({ status: 500 }, { status: 500 });
    await sendWaiting(context);
    const next = repair(412);
    answers.push(stored(mine), stored(next));
    expect(await keepAndSend(context, next)).toMatchObject({ state: 'sent' });
    expect(asked).toEqual([mine.id, others.id, mine.id, next.id]);
  });

  test('When a clock ran ahead, then it is not refused but kept, with what to do, and goes when the server has come that far', async () => {
    const entry = repair(412, '2026-03-05T11:00:00.000Z');
    keep(entry);
    answers.push({ status: 422, body: { type: 'urn:refettle:problem:invalid', title: 'Invalid', status: 422 } });
    const [waits] = await sendWaiting(context, { random: () => 0 });
    expect(waits).toMatchObject({ state: 'waits', why: expect.stringContaining('Set the clock of this bench') as string });
    expect(waits?.state === 'waits' && waits.nextAt).toBe('2026-03-05T10:50:00.000Z');
    answers.push(stored(entry));
    now = new Date('2026-03-05T10:50:00.000Z');
    expect(await sendWaiting(context, { due: true })).toMatchObject([{ state: 'sent' }]);
  });

  test('When a clock ran a year ahead, then the watch sleeps minutes at a time, and a person may give it up', async () => {
    const entry = repair(412, '2027-03-05T09:00:00.000Z');
    keep(entry);
    answers.push({ status: 422, body: { type: 'urn:refettle:problem:invalid', title: 'Invalid', status: 422 } });
    const slept: number[] = [];
    const enough = Object.assign(new Error('enough'), { name: 'Enough' });
    const sleep = (ms: number): Promise<void> => {
      slept.push(ms);
      return slept.length < 3 ? context.sleep(ms) : Promise.reject(enough);
    };
    await expect(runSync({ watch: true }, { ...context, sleep })).rejects.toBe(enough);
    // The longest back-off: five minutes.
    expect(slept).toEqual([300_000, 300_000, 300_000]);
    expect(asked).toHaveLength(1);
    expect(await runSync({ drop: entry.id }, context)).toBe(0);
  });

  test('When a wait was set by a clock that ran ahead and has been put right, then it is over', async () => {
    const entry = repair();
    keep(entry);
    now = new Date('2027-03-05T09:00:00.000Z');
    answers.push({ status: 503, headers: { 'retry-after': '120' } });
    await sendWaiting(context);
    now = new Date('2026-03-05T09:00:00.000Z');
    answers.push(stored(entry));
    expect(await sendWaiting(context, { due: true })).toMatchObject([{ state: 'sent' }]);
  });

  test('When it is watched, then it is tried again, longer apart each time, until everything is there', async () => {
    const entry = repair();
    keep(entry);
    answers.push({ status: 503 }, { status: 503 }, { status: 503 }, stored(entry));
    expect(await runSync({ watch: true }, context)).toBe(0);
    expect(asked).toHaveLength(4);
    expect(bench.stdout()).toBe(`sent: ${entry.what}\n`);
    // Waits of at least 1, 2 and 4 s.
    expect(now.getTime() - Date.parse('2026-03-05T09:00:00.000Z')).toBeGreaterThanOrEqual(7000);
  });

  test('When what is left is for somebody to decide, then the watch ends and says who', async () => {
    keep(repair());
    answers.push({
      status: 409,
      body: { type: 'urn:refettle:problem:conflict', title: 'Sold', status: 409, detail: 'It was sold.', remedy: 'a lead opens it again' },
    });
    expect(await runSync({ watch: true }, context)).toBe(5);
    expect(bench.stdout()).toContain('A lead opens it again');
  });

  test('When another terminal is sending, then this one does not', async () => {
    keep(repair());
    const lock = await takeLock(bench.context, SENDER_LOCK, { what: 'sending' });
    expect(await sendWaiting(context)).toMatchObject([{ state: 'waits', why: 'it is being sent by another terminal' }]);
    expect(asked).toEqual([]);
    if ('release' in lock) lock.release();
  });

  test('When asked how it stands, then it says what waits, since when, how often tried, and when again, in words and in JSON', async () => {
    const entry = repair();
    keep(entry);
    await sendWaiting(context, { random: () => 0 });
    await sendWaiting(context, { random: () => 0 });
    expect(await runSync({ status: true, json: true }, context)).toBe(5);
    expect(JSON.parse(bench.stdout())).toMatchObject({
      sent: [],
      left: [{ id: entry.id, state: 'waits', tries: 2, lastTryAt: '2026-03-05T09:00:00.000Z', nextTryAt: '2026-03-05T09:00:02.000Z' }],
    });
    expect(await runSync({ status: true }, context)).toBe(5);
    expect(bench.stdout()).toMatch(/tried 2 times, last at \d\d:\d\d; again from \d\d:\d\d on/);
  });
});
