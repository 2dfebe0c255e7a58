import { createServer, type Server } from 'node:http';
import type { AddressInfo } from 'node:net';
import { existsSync, mkdirSync, statSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { afterEach, beforeEach, describe, expect, test } from 'vitest';
import { keepAndSend, sendWaiting } from '../../../cli/journal/deliver.js';
import { keepEntry, waitingEntries, type OutboxEntry } from '../../../cli/journal/outbox.js';
import { runSync } from '../../../cli/commands/sync.js';
import { benchTerminal, signedIn, type BenchTerminal } from '../../helpers/bench-terminal.js';
import { wil } from '../../helpers/unit-facts.js';

interface Asked {
  key: string | undefined;
  path: string | undefined;
}

/** Something that answers over HTTP as told: how a server refuses or falls silent is what is tried here, not what it stores. */
let answers: { status: number; body: unknown }[];
let asked: Asked[];
let server: Server;
let address: string;
let bench: BenchTerminal;

beforeEach(async () => {
  answers = [];
  asked = [];
  server = createServer((request, response) => {
    asked.push({ key: request.headers['idempotency-key'] as string | undefined, path: request.url });
    const { status, body } = answers.shift() ?? { status: 500, body: {} };
    request.resume().on('end', () => response.writeHead(status, { 'content-type': 'application/json' }).end(JSON.stringify(body)));
  });
  await new Promise<void>((ready) => server.listen(0, '127.0.0.1', ready));
  address = `http://127.0.0.1:${(server.address() as AddressInfo).port}`;
  bench = benchTerminal({ env: { REFETTLE_SERVER: address } });
  signedIn(bench, { ...wil, role: 'technician', email: 'wil@millrace.example', token: 'secret' });
});
afterEach(async () => {
  bench.remove();
  await new Promise((closed) => server.close(closed));
});

let count = 0;
function repair(change: Partial<OutboxEntry> = {}): OutboxEntry {
  count += 1;
  const id = `019af7a0-0000-7000-8000-${String(count).padStart(12, '0')}`;
  const madeAt = new Date(Date.UTC(2026, 2, 5, 9, 0, count)).toISOString();
  return {
    route: 'recordRepair',
    id,
    madeAt,
    server: address,
    by: wil,
    what: `repair ${count}`,
    params: { number: 412 },
    body: { id, at: madeAt, simulated: false, repair: { part: 'Drain pump', partSource: { kind: 'new' }, minutes: 30, costMinor: 2450 } },
    ...change,
  } as OutboxEntry;
}
const stored = (entry: OutboxEntry) => ({
  status: 201,
  body: {
    event: { id: entry.id, at: entry.madeAt, by: wil, simulated: false, kind: 'repair', repair: (entry.body as { repair: object }).repair },
  },
});
const gate = {
  status: 403,
  body: {
    type: 'urn:refettle:problem:gate',
    title: 'A safety gate is shut',
    status: 403,
    detail: 'insulation is not done',
    remedy: 'a lead overrides with a reason',
  },
};
const states = (deliveries: { state: string }[]): string[] => deliveries.map(({ state }) => state);

describe('What must not get lost', () => {
  test('When the server takes it, then it waits no longer and stays on the disk', async () => {
    const entry = repair();
    answers.push(stored(entry));
    expect(await keepAndSend(bench.context, entry)).toMatchObject({ state: 'sent' });
    expect(asked).toEqual([{ key: entry.id, path: '/api/units/412/repairs' }]);
    expect(waitingEntries(bench.context.home).entries).toEqual([]);
    expect(existsSync(join(bench.home, 'journal', 'sent', `${entry.id}.json`))).toBe(true);
  });

  test('When the network is away, then everything waits in the order in which it was written down, and is sent so under the same keys', async () => {
    // The clock of the bench is set back between the two.
    const [second, first] = [repair(), repair()];
    keepEntry(bench.context.home, first);
    keepEntry(bench.context.home, second);
    answers.push({ status: 503, body: { type: 'urn:refettle:problem:fault', title: 'Not now', status: 503 } });
    expect(states(await sendWaiting(bench.context))).toEqual(['waits', 'waits']);
    expect(asked).toHaveLength(1);
    answers.push(stored(first), stored(second));
    expect(states(await sendWaiting(bench.context))).toEqual(['sent', 'sent']);
    expect(asked.map(({ key }) => key)).toEqual([first.id, first.id, second.id]);
  });

  test('When entries of before there were numbers wait, then they go first, by their time', () => {
    const [older, newer, numbered] = [repair(), repair(), repair({ madeAt: '2026-03-04T09:00:00.000Z' })];
    mkdirSync(join(bench.home, 'journal', 'outbox'), { recursive: true });
    for (const entry of [newer, older]) writeFileSync(join(bench.home, 'journal', 'outbox', `${entry.id}.json`), JSON.stringify(entry));
    keepEntry(bench.context.home, numbered);
    // Written down again, it keeps its place.
    keepEntry(bench.context.home, older);
    expect(waitingEntries(bench.context.home).entries.map(({ id }) => id)).toEqual([older.id, newer.id, numbered.id]);
  });

  test('When the server refuses one, then it is kept with who must act, the others go, and only sync tries it again', async () => {
    const [refused, other] = [repair(), repair()];
    keepEntry(bench.context.home, refused);
    answers.push(gate, stored(other));
    expect(await keepAndSend(bench.context, other)).toMatchObject({ state: 'sent' });
    expect(waitingEntries(bench.context.home).entries).toMatchObject([
      { id: refused.id, refused: { status: 403, remedy: 'a lead overrides with a reason' } },
    ]);

    expect(states(await sendWaiting(bench.context))).toEqual(['refused']);
    expect(asked).toHaveLength(2);
    expect(await runSync({ status: true }, bench.context)).toBe(5);
    expect(bench.stdout()).toContain('insulation is not done');
    expect(bench.stdout()).toContain('a lead overrides with a reason');

    answers.push(stored(refused));
    expect(await runSync({}, bench.context)).toBe(0);
    expect(bench.stdout()).toContain(`sent: ${refused.what}`);
  });

  test('When somebody else has signed in, then nobody sends another’s work as their own', async () => {
    const entry = repair({ by: { id: 'tamsin', name: 'Tamsin Oake', role: 'technician' } });
    expect(await keepAndSend(bench.context, entry)).toMatchObject({
      state: 'waits',
      why: expect.stringContaining('Tamsin Oake') as string,
    });
    expect(asked).toEqual([]);
  });

  test('When it is for another server, then it does not go to this one', async () => {
    const [elsewhere, here] = [repair({ server: 'http://192.0.2.7:4780' }), repair()];
    keepEntry(bench.context.home, elsewhere);
    answers.push(stored(here));
    expect(await keepAndSend(bench.context, here)).toMatchObject({ state: 'sent' });
    expect(waitingEntries(bench.context.home).entries.map(({ id }) => id)).toEqual([elsewhere.id]);
  });

  test('When the sign-in has run out, then it waits and says how to sign in', async () => {
    const entry = repair();
    answers.push({ status: 401, body: { type: 'urn:refettle:problem:not-signed-in', title: 'Sign in', status: 401 } });
    expect(await keepAndSend(bench.context, entry)).toMatchObject({
      state: 'waits',
      why: expect.stringContaining('refettle sign-in') as string,
    });
  });

  test('When a waiting file can’t be read, then it stays, is named, and the others are sent', async () => {
    mkdirSync(join(bench.home, 'journal', 'outbox'), { recursive: true });
    writeFileSync(join(bench.home, 'journal', 'outbox', 'half.json'), '{"route":"recordRep');
    const entry = repair();
    keepEntry(bench.context.home, entry);
    answers.push(stored(entry));
    expect(await runSync({}, bench.context)).toBe(3);
    expect(bench.stderr()).toContain('half.json');
    expect(bench.stdout()).toContain('sent:');
    expect(existsSync(join(bench.home, 'journal', 'outbox', 'half.json'))).toBe(true);
  });

  test('When one that is only waiting is given up, then that is refused; a refused one may be', async () => {
    const entry = repair();
    keepEntry(bench.context.home, entry);
    await expect(runSync({ drop: entry.id }, bench.context)).rejects.toThrow(/only waiting/);
    answers.push(gate);
    await sendWaiting(bench.context);
    expect(await runSync({ drop: entry.id }, bench.context)).toBe(0);
    expect(existsSync(join(bench.home, 'journal', 'dropped', `${entry.id}.json`))).toBe(true);
  });

  test('When nothing waits, then sync says so and exits 0; JSON is one line', async () => {
    expect(await runSync({ json: true }, bench.context)).toBe(0);
    expect(JSON.parse(bench.stdout())).toEqual({ sent: [], left: [] });
  });

  test('When the token is kept, then only its owner may read it', () => {
    expect(statSync(join(bench.home, 'token.json')).mode & 0o777).toBe(0o600);
  });
});
