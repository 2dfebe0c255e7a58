import { once } from 'node:events';
import { mkdtempSync, rmSync } from 'node:fs';
import { createServer } from 'node:http';
import { connect, type AddressInfo, type Socket } from 'node:net';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { setTimeout as pause } from 'node:timers/promises';
import { v4 as anyId } from 'uuid';
import { afterAll, beforeAll, expect, onTestFinished, test } from 'vitest';
import type { LiveMessage } from '../../../shared/api/live.js';
import { createApp } from '../../../server/app.js';
import { openDb } from '../../../server/db.js';
import { LiveHub } from '../../../server/features/live/live-hub.js';
import { insertLive } from '../../../server/features/live/live-store.js';
import { seededRandom } from '../../../shared/lamps/seeded-random.js';
import { addHeron, newLive, newReading, takeIn } from '../../helpers/factories.js';
import { liveClient, type LiveClient } from '../../helpers/live-client.js';
import { overHttp } from '../../helpers/over-http.js';
import { problemIn, startTestServer, type TestServer } from '../../helpers/test-server.js';

/** Two servers behind one database, each with a hub and a pool of its own. */
let server: TestServer;
let addresses: string[];
let secondHub: LiveHub;
let unit: number;

beforeAll(async () => {
  server = await startTestServer();
  await addHeron(server);
  unit = (await takeIn(server)).number;
  const url = server.deps.config.databaseUrl ?? '';
  const db = openDb(url);
  secondHub = new LiveHub({ db, databaseUrl: url, log: server.deps.log });
  const https = await Promise.all([server.app, createApp({ ...server.deps, db, live: secondHub })].map(overHttp));
  addresses = https.map(({ address }) => address);
  return async () => {
    await secondHub.close();
    await Promise.all(https.map((http) => http.unplug()));
    await db.destroy();
  };
});
afterAll(() => server.close());

function listen(at: 0 | 1, query = '', token = server.people.sales.token): LiveClient {
  const client = liveClient(addresses[at] ?? '', token, query);
  onTestFinished(() => client.cut());
  return client;
}

/** A bench that tells parts of one work, to either server in turn. */
function bench(at: () => 0 | 1 = () => 0) {
  const [sitting, work] = [anyId(), anyId()];
  let part = 0;
  return {
    work,
    tell: async (...messages: LiveMessage[]): Promise<Response> => {
      const body = { sitting, part: (part += 1), work, unit, messages };
      return fetch(`${addresses[at()]}/api/live`, {
        method: 'POST',
        headers: { 'content-type': 'application/json', authorization: `Bearer ${server.people.technician.token}` },
        body: JSON.stringify(body),
      });
    },
  };
}

const began = (): LiveMessage => newLive(unit).messages[0] as LiveMessage;
const mark = (atMs: number): LiveMessage => ({ kind: 'mark', atMs });
/** The marks of one work that were heard, in the order in which they were heard: each stands for one message. */
const marksOf = (client: LiveClient, work: string): number[] =>
  client.heard.flatMap(({ event }) =>
    event.kind === 'work' && event.work === work ? event.messages.flatMap((one) => (one.kind === 'mark' ? [one.atMs] : [])) : [],
  );
const isLive = (client: LiveClient) => client.until(({ event }) => event.kind === 'now');

test('When a bench tells one server, then a page at the other hears it, with who, where and when', async () => {
  const client = listen(1);
  await isLive(client);
  const { tell, work } = bench();
  const response = await tell(began());
  expect(await response.json()).toEqual({ taken: 'now' });
  const { event, id } = await client.until((one) => one.event.kind === 'work' && one.event.work === work);
  const { id: personId, name, role } = server.people.technician;
  expect(event).toMatchObject({ kind: 'work', unit, by: { id: personId, name, role }, at: server.time.now.toISOString() });
  expect(id).toMatch(/^\d+$/);
});

test('When a part is sent twice, then it is heard once', async () => {
  const client = listen(0);
  await isLive(client);
  const body = newLive(unit);
  const send = () => server.ok('tellLive', { as: server.people.technician, body });
  expect(await Promise.all([send(), send()])).toEqual(expect.arrayContaining([{ taken: 'now' }, { taken: 'before' }]));
  expect(await send()).toEqual({ taken: 'before' });
  const last = bench();
  await last.tell(began());
  await client.until(({ event }) => event.kind === 'work' && event.work === last.work);
  expect(client.heard.filter(({ event }) => event.kind === 'work' && event.work === body.work)).toHaveLength(1);
});

test('When a part is kept, then its commit waits for no disk', async () => {
  const { id, name, role } = server.people.technician;
  const part = newLive(unit);
  const { db } = server.deps;
  await db.transaction(async (trx) => {
    await trx.raw('set local synchronous_commit = on');
    await insertLive(trx, part, { ...part, kind: 'work', at: '2026-03-05T09:00:00.000Z', by: { id, name, role } });
    const { rows } = await trx.raw<{ rows: unknown[] }>('show synchronous_commit');
    expect(rows).toEqual([{ synchronous_commit: 'off' }]);
  });
});

test('When somebody comes in the middle of a run, then the run is told from its beginning, of its lanes only the end, and then on', async () => {
  const { tell, work } = bench();
  await tell(began());
  await tell({ kind: 'step ended', at: '2026-03-05T09:00:10.000Z', index: 0, verdict: 'pass', told: '96.8 Ω' });
  await tell({ kind: 'lamps', rows: [[0, 40, 3]] });
  await server.deps.db.raw(`update live_events set recorded_at = recorded_at - interval '61 seconds' where passing`);
  await tell({ kind: 'lamps', rows: [[50, 41, 3]] });
  const client = listen(1);
  await isLive(client);
  await tell(mark(7));
  await client.until(({ event }) => event.kind === 'work' && event.messages.some(({ kind }) => kind === 'mark'));
  const kinds = client.heard.flatMap(({ event }) =>
    (event.kind === 'work' && event.work === work ? event.messages : [event]).map(({ kind }) => kind),
  );
  const mine = kinds.filter((kind) => !['work', 'unit changed'].includes(kind));
  expect(mine).toEqual(['start', 'began', 'step ended', 'lamps', 'now', 'mark']);
});

test('When a run ended long ago, or its bench fell silent, then who comes hears nothing of it', async () => {
  const [over, silent, going] = [bench(), bench(), bench()];
  await over.tell(began(), { kind: 'ended', at: '2026-03-05T09:10:00.000Z', how: 'ended', verdict: 'pass' });
  await silent.tell(began());
  await going.tell(began());
  await server.deps.db.raw(`update live_events set recorded_at = recorded_at - interval '16 minutes' where work in (?, ?)`, [
    over.work,
    silent.work,
  ]);
  const client = listen(0);
  await isLive(client);
  const works = client.heard.flatMap(({ event }) => (event.kind === 'work' ? [event.work] : []));
  expect(works).toContain(going.work);
  expect(works).not.toContain(over.work);
  expect(works).not.toContain(silent.work);
});

const CUTS = Number(process.env['REFETTLE_FAULTS'] ?? 25);
const SEED = Number(process.env['REFETTLE_SEED'] ?? 20_261_201);

test(`When the connection is cut ${CUTS} times under load, now at this server and now at that, then nothing is missing and nothing comes twice (seed ${SEED})`, async () => {
  const random = seededRandom(SEED);
  const BENCHES = 5;
  const benches = Array.from({ length: BENCHES }, () => bench(() => (random() < 0.5 ? 0 : 1)));
  await Promise.all(benches.map((one) => one.tell(began())));
  const clients = [listen(0), listen(1)];
  await Promise.all(clients.map(isLive));
  let cutting = true;
  const told = benches.map(() => 0);
  const telling = benches.map(async ({ tell }, index) => {
    while (cutting) {
      await tell(mark((told[index] = (told[index] ?? 0) + 1)));
      await pause(random() * 8);
    }
  });
  for (let cut = 0; cut < CUTS; cut += 1) {
    await pause(20 + random() * 60);
    const client = clients[cut % 2] as LiveClient;
    client.cut();
    await client.ended();
    if (random() < 0.5) await pause(random() * 80);
    client.connect();
  }
  cutting = false;
  await Promise.all(telling);
  await Promise.all(
    clients.map(async (client) => {
      for (const [index, { work }] of benches.entries()) {
        await client.until(() => marksOf(client, work).includes(told[index] ?? 0));
        expect(marksOf(client, work)).toEqual(Array.from({ length: told[index] ?? 0 }, (_, at) => at + 1));
      }
      // It began once: a stream that starts anew would have said so.
      expect(client.heard.filter(({ event }) => event.kind === 'start')).toHaveLength(1);
    }),
  );
  // Thousands of marks of work that nobody ended: who comes next need not be told them.
  await server.deps
    .db('live_events')
    .whereIn(
      'work',
      benches.map(({ work }) => work),
    )
    .update({ recorded_at: server.deps.db.raw("recorded_at - interval '16 minutes'") });
}, 120_000);

test('When the last event heard is too long ago, or none that ever was, then the stream starts anew and says so', async () => {
  const { tell, work } = bench();
  await tell(began());
  const client = listen(0);
  await isLive(client);
  client.cut();
  await client.ended();
  await server.deps.db.raw(`update live_events set recorded_at = recorded_at - interval '6 minutes' where id = ?`, [client.lastId ?? '']);
  await tell(mark(1));
  client.connect();
  await client.until(() => client.heard.filter(({ event }) => event.kind === 'now').length === 2);
  expect(client.heard.filter(({ event }) => event.kind === 'start')).toHaveLength(2);
  expect(marksOf(client, work)).toEqual([1]);
  const invented = listen(0, '?after=999999999999');
  await isLive(invented);
  expect(invented.heard[0]?.event.kind).toBe('start');
});

test('When a page says by ?after= where it was, then it goes on there; the header counts before it', async () => {
  const { tell, work } = bench();
  await tell(began());
  const first = listen(0);
  const { id } = await isLive(first);
  await tell(mark(1));
  await first.until(() => marksOf(first, work).length === 1);
  const second = listen(1, `?after=${id}`);
  await isLive(second);
  expect(second.heard[0]?.event.kind).not.toBe('start');
  expect(marksOf(second, work)).toEqual([1]);
});

test('When only one unit is asked for, then others are not told', async () => {
  const other = (await takeIn(server)).number;
  const client = listen(0, `?unit=${other}`);
  await isLive(client);
  const elsewhere = bench();
  await elsewhere.tell(began());
  await server.ok('recordReading', { params: { number: unit }, as: server.people.technician, body: newReading(server, 'heater') });
  await server.ok('recordReading', { params: { number: other }, as: server.people.technician, body: newReading(server, 'heater') });
  await client.until(({ event }) => event.kind === 'unit changed');
  expect(client.heard.map(({ event }) => event)).toEqual([{ kind: 'start' }, { kind: 'now' }, { kind: 'unit changed', unit: other }]);
});

test('When something is written on a unit’s books at one server, then pages at both hear it once a transaction', async () => {
  const clients = [listen(0, `?unit=${unit}`), listen(1, `?unit=${unit}`)];
  await Promise.all(clients.map(isLive));
  const before = clients.map(({ heard }) => heard.length);
  await server.ok('recordReading', { params: { number: unit }, as: server.people.technician, body: newReading(server, 'heater') });
  const end = bench();
  await end.tell(began());
  await Promise.all(
    clients.map(async (client, index) => {
      await client.until(({ event }) => event.kind === 'work' && event.work === end.work);
      expect(client.heard.slice(before[index]).map(({ event }) => event.kind)).toEqual(['unit changed', 'work']);
    }),
  );
});

test('When a listener signs out, then its stream ends at once, and the others go on', async () => {
  const person = await server.addPerson('sales', 'Bram Quill');
  const [leaving, staying] = [listen(1, '', person.token), listen(1)];
  await Promise.all([isLive(leaving), isLive(staying)]);
  await server.ok('signOut', { as: person });
  await leaving.ended();
  leaving.connect();
  const { tell, work } = bench();
  await tell(began());
  await staying.until(({ event }) => event.kind === 'work' && event.work === work);
  expect(await leaving.refusal()).toBe(401);
  expect(leaving.open).toBe(false);
  expect(staying.open).toBe(true);
});

test('When PostgreSQL drops the connections that listen, then they come back by themselves and nothing is missing', async () => {
  const clients = [listen(0), listen(1)];
  await Promise.all(clients.map(isLive));
  const { tell, work } = bench();
  await tell(began());
  const LOSSES = 5;
  for (let loss = 1; loss <= LOSSES; loss += 1) {
    await server.deps.db.raw(
      `select pg_terminate_backend(pid) from pg_stat_activity where application_name = 'refettle live' and datname = current_database()`,
    );
    await tell(mark(loss));
  }
  for (const client of clients) {
    await client.until(() => marksOf(client, work).length === LOSSES);
    expect(marksOf(client, work)).toEqual([1, 2, 3, 4, 5]);
    expect(client.heard.filter(({ event }) => event.kind === 'start')).toHaveLength(1);
  }
});

/** The first server behind a socket of this machine, whose buffers are small (some hundred kilobytes): what a page does not read soon stands. */
async function overSocket(): Promise<string> {
  const folder = mkdtempSync(join(tmpdir(), 'refettle-live-'));
  const path = join(folder, 'socket');
  const http = createServer(server.app);
  await new Promise<void>((listening) => http.listen(path, listening));
  onTestFinished(() => {
    http.closeAllConnections();
    http.close();
    rmSync(folder, { recursive: true, force: true });
  });
  return path;
}
async function unread(path: string, query = ''): Promise<Socket> {
  const page = connect(path);
  onTestFinished(() => void page.destroy());
  page.write(`GET /api/live${query} HTTP/1.1\r\nHost: here\r\nAuthorization: Bearer ${server.people.sales.token}\r\n\r\n`);
  await once(page, 'readable');
  return page;
}
/** A quarter of a megabyte. */
const large = (): LiveMessage => {
  const text = 'x'.repeat(300);
  const steps = Array.from({ length: 450 }, () => ({ id: text.slice(0, 100), kind: text.slice(0, 100), title: text }));
  return { ...(began() as Extract<LiveMessage, { kind: 'began' }>), steps };
};

test('When a page does not read, then it is cut off before it fills the server, and the others go on', async () => {
  const deaf = await unread(await overSocket());
  const attentive = listen(0);
  await isLive(attentive);
  const { tell, work } = bench();
  // Three times what may wait unsent for a page (1 MB).
  const PARTS = 12;
  for (let part = 1; part <= PARTS; part += 1) expect((await tell(large(), mark(part))).status).toBe(200);
  await attentive.until(() => marksOf(attentive, work).length === PARTS);
  let bytes = 0;
  deaf.on('data', (piece) => (bytes += piece.length)).on('error', () => undefined);
  if (!deaf.closed) await once(deaf, 'close');
  expect(bytes).toBeLessThan(JSON.stringify(large()).length * PARTS);
  expect(attentive.open).toBe(true);
});

test('When a page resumes far behind and reads slowly, then it is waited for and not cut off', async () => {
  const client = listen(0);
  const { id } = await isLive(client);
  const { tell, work } = bench();
  const PARTS = 12;
  for (let part = 1; part <= PARTS; part += 1) await tell(large(), mark(part));
  await client.until(() => marksOf(client, work).length === PARTS);
  const slow = await unread(await overSocket(), `?after=${id ?? ''}`);
  let heard = '';
  while (!heard.includes('"kind":"now"') && !slow.destroyed) {
    const piece = slow.read() as Buffer | null;
    if (piece === null) await Promise.race([once(slow, 'readable'), once(slow, 'close')]);
    else heard += piece.toString('latin1');
    // Something else gets its turn: the server could go on writing.
    await pause(1);
  }
  const marks = [...heard.matchAll(/"kind":"mark","atMs":(\d+)/g)].map(([, ms]) => Number(ms));
  expect(marks).toEqual(Array.from({ length: PARTS }, (_, at) => at + 1));
  expect(heard).toContain('"kind":"now"');
});

test('When there is a row that this server can’t read, then what comes behind it is heard all the same, live and resumed', async () => {
  const { tell, work } = bench();
  const [live, resuming] = [listen(0), listen(1)];
  await Promise.all([live, resuming].map(isLive));
  await tell(began(), mark(1));
  await resuming.until(() => marksOf(resuming, work).length === 1);
  resuming.cut();
  await resuming.ended();
  // As a newer server beside this one writes it.
  await server.deps.db('live_events').insert({ key: anyId(), unit_number: unit, body: JSON.stringify({ kind: 'weather', unit }) });
  await tell(mark(2));
  resuming.connect();
  for (const client of [live, resuming]) {
    await client.until(() => marksOf(client, work).length === 2);
    expect(marksOf(client, work)).toEqual([1, 2]);
    expect(client.heard.filter(({ event }) => event.kind === 'start')).toHaveLength(1);
  }
  expect((await listen(1).until(({ event }) => event.kind === 'now')).event.kind).toBe('now');
});

test('When the database loses its last moments, then pages begin anew and go on hearing', async () => {
  const client = listen(0);
  await isLive(client);
  const { tell, work } = bench();
  await tell(began());
  const MARKS = 9;
  for (let atMs = 1; atMs <= MARKS; atMs += 1) await tell(mark(atMs));
  await client.until(() => marksOf(client, work).length === MARKS);
  await server.deps.db.transaction(async (trx) => {
    await trx('live_events').delete();
    await trx.raw('alter table live_events alter column id restart with 1');
  });
  await server.ok('recordReading', { params: { number: unit }, as: server.people.technician, body: newReading(server, 'heater') });
  await client.ended();
  client.connect();
  await client.until(() => client.heard.filter(({ event }) => event.kind === 'now').length === 2);
  await tell(began(), mark(100));
  await client.until(() => marksOf(client, work).includes(100));
});

test('When the server stops while pages are open, then their streams end at once', async () => {
  const db = openDb(server.deps.config.databaseUrl ?? '');
  const hub = new LiveHub({ db, databaseUrl: server.deps.config.databaseUrl ?? '', log: server.deps.log });
  const http = createServer(createApp({ ...server.deps, db, live: hub }));
  await new Promise<void>((listening) => http.listen(0, '127.0.0.1', listening));
  const client = liveClient(`http://127.0.0.1:${String((http.address() as AddressInfo).port)}`, server.people.lead.token);
  await isLive(client);
  await hub.close();
  // Resolves only when no connection is left: a stream that stayed open would let this test run out of time.
  await new Promise((closed) => http.close(closed));
  await client.ended();
  await db.destroy();
});

test('When a bench tells of a unit that is not there, or rows that are askew, then it is refused', async () => {
  const { technician } = server.people;
  expect(problemIn(await server.send('tellLive', { as: technician, body: newLive(99_999) })).status).toBe(404);
  const askew = newLive(unit, {
    messages: [
      {
        kind: 'lamps',
        rows: [
          [0, 1],
          [50, 1, 2],
        ],
      },
    ],
  });
  expect(problemIn(await server.send('tellLive', { as: technician, body: askew }))).toMatchObject({
    status: 422,
    errors: [{ pointer: '/messages/0/rows' }],
  });
});
