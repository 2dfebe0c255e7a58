import { afterAll, beforeAll, expect, test } from 'vitest';
import { tidyUp } from '../../server/housekeeping.js';
import { addHeron, newInspection, newReading, newRepair, newRun, newUnit, takeIn } from '../helpers/factories.js';
import { problemIn, startTestServer, type TestServer } from '../helpers/test-server.js';

let server: TestServer;
beforeAll(async () => {
  server = await startTestServer();
  await addHeron(server);
});
afterAll(() => server.close());

const countUnits = async (): Promise<number> => Number((await server.deps.db('units').count('* as n').first())?.['n']);
const take = (key: string, body: object, as = server.people.technician) => server.send('takeInUnit', { as, key, body });

test('When the key is missing, empty or too long, then it is 422 and the header is named', async () => {
  const as = server.people.technician;
  const without = await server.send('takeInUnit', { as, body: newUnit() }).unset('Idempotency-Key');
  const long = await take('k'.repeat(201), newUnit());
  for (const response of [without, long]) {
    const problem = problemIn(response);
    expect(problem).toMatchObject({ status: 422, kind: 'invalid' });
    expect(problem.errors?.[0]?.reason).toContain('Idempotency-Key');
  }
  expect((await take('k'.repeat(200), newUnit())).status).toBe(201);
});

test('When the same is sent twice, then it is stored once and answered alike', async () => {
  const body = newUnit();
  const before = await countUnits();
  const first = await take('twice', body);
  const again = await take(
    'twice',
    JSON.parse(JSON.stringify(body, Object.keys(body).reverse().concat(Object.keys(body.plate)))) as object,
  );

  expect([first.status, again.status]).toEqual([201, 201]);
  expect(again.text).toBe(first.text);
  expect(again.headers['idempotency-replayed']).toBe('true');
  expect(await countUnits()).toBe(before + 1);
});

test('When the key comes with another body or on another address, then it is 409', async () => {
  const { number } = await takeIn(server);
  await take('used', newUnit()).expect(201);

  expect(problemIn(await take('used', newUnit()))).toMatchObject({ status: 409, kind: 'conflict' });
  const reading = await server.send('recordReading', {
    as: server.people.technician,
    params: { number },
    key: 'used',
    body: newReading(server, 'heater'),
  });
  expect(problemIn(reading).status).toBe(409);
});

test('When two people use the same key, then they do not meet', async () => {
  expect((await take('shared', newUnit())).status).toBe(201);
  const other = await take('shared', newUnit(), server.people.lead);
  expect(other.status).toBe(201);
  expect(other.headers['idempotency-replayed']).toBeUndefined();
});

test('When ten send the same at the same moment, then one does the work and all get its answer', async () => {
  const body = newUnit();
  const before = await countUnits();
  const answers = await Promise.all(Array.from({ length: 10 }, () => take('at-once', body)));

  expect(new Set(answers.map(({ status }) => status))).toEqual(new Set([201]));
  expect(new Set(answers.map(({ text }) => text)).size).toBe(1);
  expect(await countUnits()).toBe(before + 1);
});

test('When two send other bodies under one key at the same moment, then one is stored and the other is told', async () => {
  const answers = await Promise.all([take('clash', newUnit()), take('clash', newUnit())]);
  expect(answers.map(({ status }) => status).sort()).toEqual([201, 409]);
});

test('When the work is refused, then nothing is kept and the key is free for the mended request', async () => {
  const { number } = await takeIn(server);
  const call = { as: server.people.technician, params: { number }, key: 'refused-first' };
  // An energised reading before the dead tests: gate 1.
  expect((await server.send('recordReading', { ...call, body: newReading(server, 'protective-conductor-current') })).status).toBe(403);
  expect((await server.send('recordReading', { ...call, body: newReading(server, 'heater') })).status).toBe(201);
});

test('When a bench log is sent again after a lost answer, then it is stored once', async () => {
  const { number } = await takeIn(server);
  const call = { as: server.people.technician, params: { number }, key: 'the-run', body: newRun(server, 'h6-mend') };
  const first = await server.send('recordRun', call);
  const again = await server.send('recordRun', call);

  expect(again.text).toBe(first.text);
  const page = await server.ok('getUnit', { as: server.people.technician, params: { number } });
  expect(page.runs).toHaveLength(1);
  expect(page.events.filter((event) => event.kind === 'repair')).toHaveLength(1);
  // Under another key the id of the run still tells.
  expect(problemIn(await server.send('recordRun', { ...call, key: 'another' }))).toMatchObject({ status: 409 });
});

test('When one piece of work is sent under two keys, then its id tells, whatever kind it is', async () => {
  const { number } = await takeIn(server);
  const call = { as: server.people.technician, params: { number } };
  const works = [
    ['recordReading', newReading(server, 'heater')],
    ['recordInspection', newInspection(server)],
    ['recordRepair', newRepair(server)],
  ] as const;
  for (const [name, body] of works) {
    expect((await server.ok(name, { ...call, body })).event.id).toBe(body.id);
    expect(problemIn(await server.send(name, { ...call, body }))).toMatchObject({ status: 409, kind: 'conflict' });
  }
  expect(problemIn(await server.send('recordRepair', { ...call, body: { ...newRepair(server), id: works[0][1].id } })).status).toBe(409);
  const page = await server.ok('getUnit', call);
  expect(page.events.slice(1).map(({ id }) => id)).toEqual(works.map(([, { id }]) => id));
});

test('When an override is sent again after a lost answer, then the gate is opened once', async () => {
  const { number } = await takeIn(server);
  const body = { gate: 'dead tests', reason: 'the insulation tester is away' };
  const call = { as: server.people.lead, params: { number }, key: 'the-override', body };
  const [first, again] = [await server.send('recordOverride', call), await server.send('recordOverride', call)];
  expect([first.status, again.text]).toEqual([201, first.text]);
  const page = await server.ok('getUnit', { as: server.people.lead, params: { number } });
  expect(page.events.filter(({ kind }) => kind === 'override')).toHaveLength(1);
});

test('When 90 days have passed, then the key is forgotten, and not before', async () => {
  await take('old', newUnit()).expect(201);
  const day = 86_400_000;
  const sentAt = server.time.now;
  const keys = () => server.deps.db('idempotency_keys').where({ key: 'old' });
  server.time.now = new Date(sentAt.getTime() + 90 * day);
  await tidyUp(server.deps);
  expect(await keys()).toHaveLength(1);
  server.time.now = new Date(sentAt.getTime() + 90 * day + 1);
  await tidyUp(server.deps);
  expect(await keys()).toHaveLength(0);
  server.time.now = sentAt;
});
