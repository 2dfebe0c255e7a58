// The gates that decide what counts and who signs, tried around by the API. Numbers are those of the product's list of gates.
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import { captureFile } from '../helpers/bench-log.js';
import {
  addHeron,
  mendAndProve,
  newCapture,
  newInspection,
  newReading,
  newRepair,
  newRun,
  pass,
  passDeadTests,
  rulesSeen,
  signedOffUnit,
  takeIn,
} from '../helpers/factories.js';
import { problemIn, startTestServer, type TestServer } from '../helpers/test-server.js';

let server: TestServer;
let demo: TestServer;
beforeAll(async () => {
  server = await startTestServer();
  demo = await startTestServer({ shop: { demo: true }, config: { demo: true } });
  await addHeron(server);
  await addHeron(demo);
});
afterAll(() => Promise.all([server.close(), demo.close()]));

const by = (number: number, on: TestServer = server) => ({ params: { number }, as: on.people.technician });
const page = (number: number, on: TestServer = server) => on.ok('getUnit', by(number, on));
const ruleOf = async (number: number, id: string, on: TestServer = server) =>
  (await page(number, on)).readiness.rules.find((rule) => rule.id === id);

describe('Gate 6, simulated results never count outside the demo shop', () => {
  test('When everything was simulated, then the shop’s rules see nothing of it, and the demo shop’s do', async () => {
    const real = await takeIn(server);
    await server.ok('recordRun', { ...by(real.number), body: newRun(server, 'h6-mend', { simulated: true }) });
    await server.ok('recordInspection', { ...by(real.number), body: newInspection(server, 'pass', true) });
    expect(
      (await server.send('recordReading', { ...by(real.number), body: newReading(server, 'protective-conductor', undefined, true) }))
        .status,
    ).toBe(403);
    expect((await page(real.number)).readiness.met).toBe(0);
    // Nor do they move its stage, on its page or in the list.
    expect((await page(real.number)).stage).toBe('intake');
    const listed = await server.ok('listUnits', { as: server.people.sales, query: { stage: 'intake', limit: 200 } });
    expect(listed.items.find((row) => row.number === real.number)).toMatchObject({ stage: 'intake' });
    expect(
      (await server.send('recordCapture', { ...by(real.number), body: newCapture(server, 'ready blink', { source: 'simulated' }) })).status,
    ).toBe(403);
    expect((await server.send('recordRun', { ...by(real.number), body: newRun(server, 'h6-prove', { simulated: true }) })).status).toBe(
      403,
    );

    const shown = await takeIn(demo);
    await mendAndProve(demo, shown.number, { simulated: true });
    expect((await page(shown.number, demo)).readiness).toMatchObject({ met: 4, readyToSign: true });
  });

  test('When a real rig asks in the demo shop, then simulated dead tests open nothing', async () => {
    const { number } = await takeIn(demo);
    await passDeadTests(demo, number, true);
    expect(
      (await demo.send('recordCapture', { ...by(number, demo), body: newCapture(demo, 'ready blink', { source: 'probe' }) })).status,
    ).toBe(403);
    expect(
      (await demo.send('recordCapture', { ...by(number, demo), body: newCapture(demo, 'ready blink', { source: 'simulated' }) })).status,
    ).toBe(201);
  });

  test('When a capture calls itself simulated on a rig that does not, then it is simulated', async () => {
    const { number } = await takeIn(server);
    const file = captureFile('ready blink', { source: 'simulated' });
    const run = newRun(server, 'h6-find', { change: (step) => (step.kind === 'capture' ? { ...step, file } : step) });
    await server.ok('recordRun', { ...by(number), body: run });
    const events = (await page(number)).events;
    expect(events.filter((event) => event.simulated).map((event) => event.kind)).toEqual(['capture']);
    expect(await ruleOf(number, 'no-code')).toMatchObject({ state: 'missing' });
  });

  test('When a capture comes from a file, then it is kept, and counts only if it names this unit and is newer than the repair', async () => {
    const { number } = await takeIn(server);
    const noCode = async (header: { unit?: string; capturedAt?: string }) => {
      await server.ok('recordCapture', { ...by(number), body: newCapture(server, 'ready blink', { fromFile: true, ...header }) });
      return (await ruleOf(number, 'no-code'))?.state;
    };
    expect(await noCode({})).toBe('missing');
    expect(await noCode({ unit: '9999' })).toBe('missing');
    pass(server, 5);
    const beforeRepair = server.time.now.toISOString();
    pass(server, 5);
    await server.ok('recordRepair', { ...by(number), body: newRepair(server) });
    pass(server, 1);
    await server.ok('recordRun', {
      ...by(number),
      body: newRun(server, 'h6-prove', { change: (step) => (step.kind === 'capture' || step.kind === 'expect' ? undefined : step) }),
    });
    pass(server, 25);
    expect(await noCode({ unit: String(number), capturedAt: beforeRepair })).toBe('missing');
    expect(await noCode({ unit: `0${String(number)}` })).toBe('met');
  });
});

describe('Gate 7, four eyes', () => {
  test('When a lead did the work, then that lead can’t sign and another one can', async () => {
    const { number } = await takeIn(server);
    await mendAndProve(server, number, { as: server.people.lead });
    const own = problemIn(
      await server.send('signOff', { params: { number }, as: server.people.lead, body: await rulesSeen(server, number) }),
    );
    expect(own).toMatchObject({ status: 403, kind: 'gate' });
    expect(own.errors?.map(({ reason }) => reason)).toEqual([expect.stringContaining('Four eyes: fail, Maren Holt worked on it')]);
    await server.ok('signOff', { params: { number }, as: server.otherLead, body: await rulesSeen(server, number) });
  });

  test('When a lead took only one reading, then that counts as hands on it', async () => {
    const { number } = await takeIn(server);
    await server.ok('recordReading', { params: { number }, as: server.people.lead, body: newReading(server, 'heater') });
    pass(server, 1);
    await mendAndProve(server, number);
    expect(
      (await server.send('signOff', { params: { number }, as: server.people.lead, body: await rulesSeen(server, number) })).status,
    ).toBe(403);
  });

  test('When the shop has one person and switched it off, then that person signs, and the tag says so', async () => {
    const alone = await startTestServer({ shop: { fourEyes: false } });
    await addHeron(alone);
    const { number } = await takeIn(alone);
    await mendAndProve(alone, number, { as: alone.people.lead });
    const tag = await alone.ok('signOff', { params: { number }, as: alone.people.lead, body: await rulesSeen(alone, number) });
    expect(tag.content.fourEyes).toBe(false);
    await alone.close();
  });
});

describe('Gate 8, what withdraws a tag', () => {
  const withdrawnBecause = async (number: number) => (await server.ok('getUnitTag', by(number))).withdrawn?.reason;

  test('When a check fails, the machine is mended, or a code shows afterwards, then the tag ends in the same moment', async () => {
    const failing = await signedOffUnit(server);
    await server.ok('recordReading', { ...by(failing.unit.number), body: newReading(server, 'heater', 31) });
    expect(await withdrawnBecause(failing.unit.number)).toBe('a later check did not pass: Heater, fail');
    expect((await page(failing.unit.number)).stage).toBe('proving');

    const mended = await signedOffUnit(server);
    await server.ok('recordRepair', { ...by(mended.unit.number), body: newRepair(server, { part: 'Lid lock' }) });
    expect(await withdrawnBecause(mended.unit.number)).toBe('the machine was mended again after the sign-off: Lid lock');

    const blinking = await signedOffUnit(server);
    await server.ok('recordCapture', { ...by(blinking.unit.number), body: newCapture(server, 'G5K3') });
    expect(await withdrawnBecause(blinking.unit.number)).toBe('the lamps showed G5K3 afterwards');
    expect((await page(blinking.unit.number)).events.at(-1)).toMatchObject({ kind: 'tag withdrawn', by: { name: 'Wil Tarrow' } });
  });

  test('When a passing check or a look comes afterwards, then the tag stands', async () => {
    const { unit } = await signedOffUnit(server);
    await server.ok('recordReading', { ...by(unit.number), body: newReading(server, 'heater') });
    await server.ok('recordCapture', { ...by(unit.number), body: newCapture(server) });
    expect((await page(unit.number)).tag?.standing).toBe('stands');
  });

  test('When a part is taken out of a unit with a standing tag, then that tag ends and its history says where the part went', async () => {
    const donor = await signedOffUnit(server);
    const { number } = await takeIn(server);
    await server.ok('recordRepair', {
      ...by(number),
      body: newRepair(server, { partSource: { kind: 'used', fromUnit: donor.unit.number } }),
    });
    expect(await withdrawnBecause(donor.unit.number)).toBe('a part was taken out: Drain pump');
    const { events, stage } = await page(donor.unit.number);
    expect(events.slice(-2)).toMatchObject([{ kind: 'part removed', part: 'Drain pump', toUnit: number }, { kind: 'tag withdrawn' }]);
    expect(stage).toBe('repair');
    const signed = await server.send('signOff', {
      params: { number: donor.unit.number },
      as: server.otherLead,
      body: await rulesSeen(server, donor.unit.number),
    });
    expect(problemIn(signed)).toMatchObject({ status: 403, kind: 'gate' });
  });

  test('When a part is taken out of a unit before anybody signed it, then its checks are due again and its gate is shut', async () => {
    const donor = await takeIn(server);
    await mendAndProve(server, donor.number);
    expect((await page(donor.number)).readiness.readyToSign).toBe(true);
    const { number } = await takeIn(server);
    await server.ok('recordRun', {
      ...by(number),
      body: newRun(server, 'h6-mend', {
        change: (step) =>
          step.kind === 'repair' ? { ...step, repair: { ...step.repair, partSource: { kind: 'used', fromUnit: donor.number } } } : step,
      }),
    });
    const { readiness, energising } = await page(donor.number);
    expect(readiness.rules.map(({ id, state }) => [id, state])).toEqual([
      ['checks', 'missing'],
      ['no-code', 'missing'],
      ['calibration', 'missing'],
      ['electrical-safety', 'missing'],
      ['four-eyes', 'missing'],
    ]);
    expect(energising.open).toBe(false);
    expect(
      (
        await server.send('signOff', {
          params: { number: donor.number },
          as: server.people.lead,
          body: await rulesSeen(server, donor.number),
        })
      ).status,
    ).toBe(403);
  });

  test('When the repair that takes a part comes with a clock from before the donor’s own repair, then the donor’s tag ends all the same', async () => {
    const { number } = await takeIn(server);
    const early = newRepair(server);
    pass(server, 5);
    const donor = await signedOffUnit(server);
    const body = { ...early, repair: { ...early.repair, partSource: { kind: 'used', fromUnit: donor.unit.number } } };
    await server.ok('recordRepair', { ...by(number), body });
    expect(await withdrawnBecause(donor.unit.number)).toBe('a part was taken out: Drain pump');
  });

  test('When the donor is not there, or is the unit itself, then the repair is refused', async () => {
    const { number } = await takeIn(server);
    for (const fromUnit of [999_999, number, 9_007_199_254_740_991]) {
      const problem = problemIn(
        await server.send('recordRepair', { ...by(number), body: newRepair(server, { partSource: { kind: 'used', fromUnit } }) }),
      );
      expect(problem).toMatchObject({ status: 422, errors: [{ pointer: '/repair/partSource/fromUnit' }] });
    }
  });
});
