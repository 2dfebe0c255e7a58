// A bench log in which several people had a hand: who did which step, and who tries to get round it.
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import type { RunLog } from '../../../shared/script/run-log.js';
import { addHeron, mendAndProve, newRun, pass, rulesSeen, takeIn } from '../../helpers/factories.js';
import { makeBench, standsAt, type TestBench } from '../../helpers/shared-bench.js';
import { problemIn, startTestServer, type AtBench, type SignedInPerson, type TestServer } from '../../helpers/test-server.js';

let server: TestServer;
let bench: TestBench;
let wil: SignedInPerson;
let tamsin: SignedInPerson;
let asWil: AtBench;
beforeAll(async () => {
  server = await startTestServer();
  await addHeron(server);
  bench = await makeBench(server, 'bench 1');
  wil = server.people.technician;
  tamsin = await server.addPerson('technician', 'Tamsin Oake');
  asWil = await standsAt(server, bench, wil);
  await standsAt(server, bench, tamsin);
});
afterAll(() => server.close());

const ref = ({ id, name, role }: SignedInPerson) => ({ id, name, role });

/** Wil begins, somebody takes over at this step and goes on to the end. */
function handedOver(log: RunLog, to: SignedInPerson, at: number): RunLog {
  return {
    ...log,
    people: [
      { person: ref(wil), at: log.startedAt, how: 'began', steps: 0 },
      { person: ref(to), at: log.steps[at]?.startedAt ?? log.startedAt, how: 'took over', steps: at },
    ],
    steps: log.steps.map((step, index) => (index >= at ? { ...step, by: to.id } : step)),
  };
}

async function mendHandedOver(to: SignedInPerson, change: (log: RunLog) => RunLog = (log) => log) {
  const { number } = await takeIn(server);
  const log = change(handedOver(newRun(server, 'h6-mend'), to, 1));
  return { number, log, send: (as: AtBench | SignedInPerson) => server.send('recordRun', { params: { number }, as, body: log }) };
}

describe('A run that was handed over', () => {
  test('When a shared bench sends it, then each step’s event is by the person of that step, under the shop’s name and role', async () => {
    const { number, log, send } = await mendHandedOver(tamsin, (one) => ({
      ...one,
      people: one.people.map((entry) => ({ ...entry, person: { ...entry.person, name: 'Somebody Grand', role: 'lead' as const } })),
    }));
    expect((await send(asWil)).status).toBe(201);
    const page = await server.ok('getUnit', { as: server.people.lead, params: { number } });
    const repair = page.events.find(({ kind }) => kind === 'repair');
    expect(repair?.by).toEqual(ref(tamsin));
    expect(page.events.find(({ kind }) => kind === 'run began')?.by).toEqual(ref(wil));
    expect(page.events.find(({ kind }) => kind === 'run ended')).toMatchObject({ people: [ref(wil), ref(tamsin)] });
    const run = await server.ok('getRun', { as: server.people.lead, params: { id: log.id } });
    expect(run.people.map(({ person, how }) => [person.name, how])).toEqual([
      ['Wil Tarrow', 'began'],
      ['Tamsin Oake', 'took over'],
    ]);
  });

  test('When a capture was recorded by the second person, then the capture is by that person', async () => {
    const { number } = await takeIn(server);
    const find = newRun(server, 'h6-find');
    const captured = find.steps.findIndex(({ kind }) => kind === 'capture');
    // Whoever takes over answers the caution anew.
    const log = handedOver(
      find,
      tamsin,
      find.steps.findLastIndex(({ kind }, index) => kind === 'caution' && index < captured),
    );
    pass(server, log.steps.length + 1);
    await server.ok('recordRun', { params: { number }, as: asWil, body: log });
    const step = log.steps[captured];
    const captureId = step?.kind === 'capture' ? step.captureId : '';
    expect((await server.ok('getCapture', { as: wil, params: { id: captureId } })).by).toEqual(ref(tamsin));
  });

  test('When a lead had a hand in it, then that lead does not sign: four eyes sees everybody', async () => {
    const { lead } = server.people;
    await standsAt(server, bench, lead);
    const { number } = await takeIn(server);
    // Only a parked run: the lead did no step that leaves an event.
    const find = newRun(server, 'h6-find', { change: (result) => result });
    pass(server, find.steps.length + 1);
    await server.ok('recordRun', {
      params: { number },
      as: asWil,
      body: {
        ...find,
        people: [
          { person: ref(wil), at: find.startedAt, how: 'began', steps: 0 },
          { person: ref(lead), at: find.endedAt, how: 'resumed', steps: find.steps.length },
        ],
      },
    });
    pass(server, 1);
    await mendAndProve(server, number);
    const signs = { params: { number }, body: await rulesSeen(server, number) };
    expect(problemIn(await server.send('signOff', { ...signs, as: lead }))).toMatchObject({ status: 403 });
    expect((await server.send('signOff', { ...signs, as: server.otherLead })).status).toBe(201);
  });
});

describe('Who tries to get round it', () => {
  const refused = async (response: Promise<unknown>): Promise<ReturnType<typeof problemIn>> => problemIn((await response) as never);

  test('When a person’s own sign-in sends what somebody else did, then it is refused', async () => {
    const { send } = await mendHandedOver(tamsin);
    expect(await refused(send(wil))).toMatchObject({ status: 422, errors: [{ pointer: '/people/1/person' }] });
  });

  test('When a step is by somebody whom the log does not name, then it is refused, whoever that is', async () => {
    for (const by of [tamsin.id, server.people.lead.id, '']) {
      const { send } = await mendHandedOver(tamsin, (log) => ({
        ...log,
        people: log.people.slice(0, 1),
        steps: log.steps.map((step) => ({ ...step, by })),
      }));
      expect(await refused(send(asWil))).toMatchObject({ status: 422, errors: expect.arrayContaining([]) as unknown[] });
    }
  });

  test('When a step is by somebody who came only after it, then it is refused where it stands', async () => {
    const { send } = await mendHandedOver(tamsin, (log) => ({ ...log, steps: log.steps.map((step) => ({ ...step, by: tamsin.id })) }));
    expect(await refused(send(asWil))).toMatchObject({ status: 422, errors: [{ pointer: '/steps/0/by' }] });
  });

  test('When somebody is named who has never signed on at this bench, then it is refused, though another bench knows them', async () => {
    const stranger = await server.addPerson('technician', 'Stranger Stone');
    await standsAt(server, await makeBench(server), stranger);
    const { send } = await mendHandedOver(stranger);
    const problem = await refused(send(asWil));
    expect(problem).toMatchObject({ status: 422, errors: [{ pointer: '/people/1/person' }] });
    expect(problem.detail).toContain('signed on at bench 1');
  });

  test('When somebody else began it than in whose name it comes, then it is refused', async () => {
    const { send } = await mendHandedOver(tamsin);
    expect(await refused(send({ token: bench.token, person: tamsin.id }))).toMatchObject({
      status: 422,
      errors: [{ pointer: '/people/0/person' }],
    });
  });

  test('When a run is begun twice, or by nobody, then it is refused', async () => {
    const twice = await mendHandedOver(tamsin, (log) => ({ ...log, people: log.people.map((one) => ({ ...one, how: 'began' as const })) }));
    expect(await refused(twice.send(asWil))).toMatchObject({ status: 422, errors: [{ pointer: '/people/1/how' }] });
    const nobody = await mendHandedOver(tamsin, (log) => ({
      ...log,
      people: log.people.map((one) => ({ ...one, how: 'resumed' as const })),
    }));
    expect(await refused(nobody.send(asWil))).toMatchObject({ status: 422, errors: [{ pointer: '/people/0/how' }] });
  });

  test('When one of them was deactivated or is sales by now, then it is refused with the name', async () => {
    const leaver = await server.addPerson('technician', 'Leaver Lime');
    await standsAt(server, bench, leaver);
    await server.deps.db('people').where({ id: leaver.id }).update({ active: false });
    const gone = await refused((await mendHandedOver(leaver)).send(asWil));
    expect(gone).toMatchObject({ status: 403, kind: 'role' });
    expect(gone.detail).toContain('Leaver Lime no longer works here');
    await server.deps.db('people').where({ id: leaver.id }).update({ active: true, role: 'sales' });
    const sells = await refused((await mendHandedOver(leaver)).send(asWil));
    expect(sells.detail).toContain('Leaver Lime is sales');
  });

  test('When a log names nobody, then it is as before there were shared benches: all of it by who sends it', async () => {
    const { number } = await takeIn(server);
    await server.ok('recordRun', { params: { number }, as: wil, body: newRun(server, 'h6-mend') });
    const page = await server.ok('getUnit', { as: wil, params: { number } });
    expect(new Set(page.events.map(({ by }) => by.id))).toEqual(new Set([wil.id]));
  });
});
