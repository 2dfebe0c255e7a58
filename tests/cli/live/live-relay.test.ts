import { setTimeout as pause } from 'node:timers/promises';
import { v4 as anyId } from 'uuid';
import { expect, onTestFinished, test, vi } from 'vitest';
import type { LiveMessage, NewLive } from '../../../shared/api/live.js';
import type { Api } from '../../../cli/api/api-client.js';
import { ApiProblemError, ServerUnreachableError } from '../../../cli/errors.js';
import { fewerRows, LampThinner } from '../../../cli/live/lamp-thinner.js';
import { LiveRelay } from '../../../cli/live/live-relay.js';
import { shortened } from '../../../cli/live/live-words.js';

const began: Extract<LiveMessage, { kind: 'began' }> = {
  kind: 'began',
  at: '2026-03-05T09:00:00.000Z',
  what: 'run',
  title: 'h6-find',
  machine: 'Brindle BW 714',
  steps: [{ id: 'see', kind: 'capture', title: 'Read the codes' }],
  rig: { name: 'bench 2', simulated: false },
};
const ended: Extract<LiveMessage, { kind: 'ended' }> = { kind: 'ended', at: '2026-03-05T09:10:00.000Z', how: 'ended', verdict: 'pass' };

/** A relay whose server is made up: `answer` says what becomes of each part. */
function relayTo(answer: (part: NewLive) => Promise<void>) {
  const parts: NewLive[] = [];
  const said: string[] = [];
  const call = async (_name: string, { body }: { body: NewLive }): Promise<{ taken: 'now' }> => {
    // As it goes over the network: later changes of the relay's own lists are not seen.
    parts.push(JSON.parse(JSON.stringify(body)) as NewLive);
    await answer(body);
    return { taken: 'now' };
  };
  const relay = new LiveRelay({
    api: () => Promise.resolve({ call: call as unknown as Api['call'] }),
    newId: anyId,
    say: (line) => said.push(line),
  });
  return { relay, parts, said };
}
const kindsOf = (parts: readonly NewLive[]): string[] => parts.flatMap(({ messages }) => messages.map(({ kind }) => kind));
const lamps = (ms: number): LiveMessage => ({ kind: 'lamps', rows: [[ms, 50]] });

test('When work goes on, then all of it is told in order, the last word too, with one request in flight at most', async () => {
  let inFlight = 0;
  let most = 0;
  const { relay, parts } = relayTo(async () => {
    most = Math.max(most, (inFlight += 1));
    await pause(20);
    inFlight -= 1;
  });
  relay.begin({ id: anyId(), unit: 412 }, began);
  for (let index = 0; index < 40; index += 1) {
    relay.tell({ kind: 'mark', atMs: index });
    await pause(5);
  }
  await relay.end(ended);
  expect(kindsOf(parts)).toEqual(['began', ...Array.from({ length: 40 }, () => 'mark'), 'ended']);
  expect(most).toBe(1);
  expect(parts.map(({ part }) => part)).toEqual(parts.map((_, index) => index));
});

test('When work ends twice, then the first word is the last', async () => {
  const { relay, parts } = relayTo(() => Promise.resolve());
  relay.begin({ id: anyId(), unit: 412 }, began);
  await Promise.all([relay.end(ended), relay.end({ kind: 'ended', at: ended.at, how: 'failed' })]);
  expect(parts.flatMap(({ messages }) => messages)).toEqual([began, ended]);
});

test('When a part may have arrived or not, then the same part is sent again as it was', async () => {
  let failures = 1;
  const { relay, parts, said } = relayTo(() =>
    failures-- > 0 ? Promise.reject(new ServerUnreachableError('http://bench.example', 'the connection broke off')) : Promise.resolve(),
  );
  relay.begin({ id: anyId(), unit: 412 }, began);
  await pause(50);
  relay.tell({ kind: 'mark', atMs: 1 });
  // RETRY.firstMs is half a second.
  await pause(900);
  await relay.end(ended);
  expect(parts[1]).toEqual(parts[0]);
  expect(kindsOf(parts.slice(1))).toEqual(['began', 'mark', 'ended']);
  expect(said).toEqual([]);
});

test('When the network is away, then nothing is said, the end waits for nothing, and what waits is bounded, lamps dropped first', async () => {
  vi.useFakeTimers();
  onTestFinished(() => void vi.useRealTimers());
  let away = true;
  const { relay, parts, said } = relayTo(() =>
    away ? Promise.reject(new ServerUnreachableError('http://bench.example', 'nothing listens there')) : Promise.resolve(),
  );
  relay.begin({ id: anyId(), unit: 412 }, began);
  await vi.advanceTimersByTimeAsync(50);
  expect(parts).toHaveLength(1);
  for (let index = 0; index < 5_000; index += 1) relay.tell(index % 2 === 0 ? lamps(index) : { kind: 'mark', atMs: index });
  // Steps are told, too: they are kept before marks.
  for (let index = 0; index < 400; index += 1) relay.tell({ kind: 'step began', at: began.at, index });
  away = false;
  // RETRY.mostMs is ten seconds; then a part of fifty each tenth of a second.
  await vi.advanceTimersByTimeAsync(20_000);
  const told = kindsOf(parts.slice(1));
  expect(told[0]).toBe('began');
  expect(told.filter((kind) => kind === 'step began')).toHaveLength(400);
  expect(told.length).toBeLessThanOrEqual(1_501);
  expect(told).not.toContain('lamps');
  away = true;
  relay.tell({ kind: 'mark', atMs: 1 });
  await vi.advanceTimersByTimeAsync(200);
  const before = parts.length;
  // No timer runs: whatever waited for one would wait for ever.
  await relay.end(ended);
  expect(parts).toHaveLength(before);
  expect(said).toEqual([]);
});

const refusal = (errors: { pointer: string; reason: string }[]): ApiProblemError =>
  new ApiProblemError({ status: 422, kind: 'invalid', title: 'Some of it can’t be used', remedy: 'Change it.', errors });

test('When the server can’t use one message, then that one is left out and all others are told, under the same number', async () => {
  const { relay, parts, said } = relayTo(({ messages }) => {
    const bad = messages.findIndex((message) => message.kind === 'mark' && message.atMs === 2);
    return bad < 0 ? Promise.resolve() : Promise.reject(refusal([{ pointer: `/messages/${bad}/atMs`, reason: 'is too much' }]));
  });
  relay.begin({ id: anyId(), unit: 412 }, began);
  for (const atMs of [1, 2, 3]) relay.tell({ kind: 'mark', atMs });
  await relay.end(ended);
  const taken = new Map(parts.map((part) => [part.part, part.messages]));
  expect([...taken.values()].flat()).toEqual([began, { kind: 'mark', atMs: 1 }, { kind: 'mark', atMs: 3 }, ended]);
  expect(said).toEqual([]);
});

test('When the server can’t use one message and does not say which, then it is found by sending each alone', async () => {
  const { relay, parts, said } = relayTo(({ messages }) =>
    messages.some((message) => message.kind === 'mark' && message.atMs === 2) ? Promise.reject(refusal([])) : Promise.resolve(),
  );
  vi.useFakeTimers();
  onTestFinished(() => void vi.useRealTimers());
  relay.begin({ id: anyId(), unit: 412 }, began);
  for (const atMs of [1, 2, 3]) relay.tell({ kind: 'mark', atMs });
  const end = relay.end(ended);
  await vi.advanceTimersByTimeAsync(900);
  await end;
  const good = parts.flatMap(({ messages }) => (messages.some((one) => one.kind === 'mark' && one.atMs === 2) ? [] : messages));
  expect(good).toEqual([began, { kind: 'mark', atMs: 1 }, { kind: 'mark', atMs: 3 }, ended]);
  expect(said).toEqual([]);
});

test('When a text is too long, then no character is cut in two, and what is no text is marked', () => {
  // U+1F527 takes two of JavaScript's units: at 298 it would be cut in the middle.
  const text = `${'a'.repeat(298)}\u{1F527}${'b'.repeat(20)}`;
  expect(shortened(text)).toBe(`${'a'.repeat(298)}…`);
  expect(shortened(`x\0\uD83Dy`)).toBe('x\uFFFD\uFFFDy');
  expect(shortened('\u{1F527}'.repeat(150))).toBe('\u{1F527}'.repeat(150));
});

test('When the server refuses, then it is said once, not while the screen is drawn on, and nothing more is sent', async () => {
  const forbidden = new ApiProblemError({
    status: 403,
    kind: 'role',
    title: 'Not yours to do',
    remedy: 'Somebody with the right role does it.',
  });
  const { relay, parts, said } = relayTo(() => Promise.reject(forbidden));
  relay.recording = true;
  relay.begin({ id: anyId(), unit: 412 }, began);
  await pause(50);
  expect(said).toEqual([]);
  relay.recording = false;
  relay.tell(lamps(1));
  await relay.end(ended);
  expect(said).toEqual(['Nobody sees this live, the work itself goes on: Not yours to do']);
  expect(parts).toHaveLength(1);
});

test('When the network is slow, then the lamps of the time between become one message of forty rows at most', async () => {
  const { relay, parts } = relayTo(() => pause(120));
  relay.begin({ id: anyId(), unit: 412 }, began);
  await pause(10);
  for (let ms = 0; ms < 20_000; ms += 50) relay.tell(lamps(ms));
  await relay.end(ended);
  const rows = parts.flatMap(({ messages }) => messages.flatMap((message) => (message.kind === 'lamps' ? [message.rows] : [])));
  expect(rows.length).toBeLessThanOrEqual(2);
  for (const one of rows) expect(one.length).toBeLessThanOrEqual(40);
  // The first row is there, and time goes on to the last quarter: nothing of it was left out.
  expect(rows[0]?.[0]?.[0]).toBe(0);
});

test('When samples come a hundred a second, then a row stands for each twentieth of a second: their mean, in percent', () => {
  const thinner = new LampThinner({ scaleMax: 1000, byKeys: false });
  const rows = Array.from({ length: 11 }, (_, sample) => thinner.push(sample * 10_000, [sample < 5 ? 100 * sample : 0, 1000]));
  // (0 + 100 + 200 + 300 + 400) / 5 = 200 of 1000.
  expect(rows.filter((row) => row !== undefined)).toEqual([
    [0, 20, 100],
    // It went dark: told with the second sample after that row, and not at the end of its slot.
    [70, 0, 100],
  ]);
});

test('When a lamp goes on, then its row is told with the second sample that shows it, and time never goes back', () => {
  const thinner = new LampThinner({ scaleMax: 1000, byKeys: false });
  const told: { row: number[]; edge: boolean }[] = [];
  // A sample each hundredth of a second; lit from 0.12 s on; one lone sample of flicker at 0.07 s.
  for (let sample = 0; sample <= 20; sample += 1) {
    const row = thinner.push(sample * 10_000, [sample >= 12 || sample === 7 ? 900 : 0]);
    if (row) told.push({ row, edge: thinner.tellsEdge });
  }
  expect(told).toEqual([
    { row: [0, 0], edge: false },
    { row: [50, 18], edge: false },
    { row: [130, 90], edge: true },
    { row: [150, 90], edge: false },
  ]);
});

test('When a lamp goes on between lanes that may wait, then it is told at once, and the lanes with it', async () => {
  vi.useFakeTimers();
  onTestFinished(() => void vi.useRealTimers());
  const { relay, parts } = relayTo(() => Promise.resolve());
  relay.begin({ id: anyId(), unit: 412 }, began);
  await vi.advanceTimersByTimeAsync(1);
  relay.tell(lamps(0), { mayWait: true });
  await vi.advanceTimersByTimeAsync(60);
  expect(parts).toHaveLength(1);
  relay.tell(lamps(50));
  await vi.advanceTimersByTimeAsync(1);
  expect(parts[1]?.messages).toEqual([
    {
      kind: 'lamps',
      rows: [
        [0, 50],
        [50, 50],
      ],
    },
  ]);
  relay.tell(lamps(100), { mayWait: true });
  await vi.advanceTimersByTimeAsync(190);
  expect(parts).toHaveLength(2);
  await vi.advanceTimersByTimeAsync(20);
  expect(parts).toHaveLength(3);
});

test('When lamps are tapped in by keys, then each press is told at once', () => {
  const thinner = new LampThinner({ scaleMax: 1, byKeys: true });
  expect(thinner.push(1_234_000, [1, 0])).toEqual([1234, 100, 0]);
});

test('When there are more rows than fit, then neighbours become one', () => {
  expect(
    fewerRows(
      [
        [0, 10],
        [50, 20],
        [100, 30],
      ],
      2,
    ),
  ).toEqual([
    [0, 15],
    [100, 30],
  ]);
});
