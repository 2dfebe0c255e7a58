import { v7 as newId, validate, version } from 'uuid';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import {
  addHeron,
  newCapture,
  newInspection,
  newReading,
  newRun,
  newUnit,
  pass,
  passDeadTests,
  signedOffUnit,
  takeIn,
} from '../../helpers/factories.js';
import { problemIn, startTestServer, type TestServer } from '../../helpers/test-server.js';

let server: TestServer;
beforeAll(async () => {
  server = await startTestServer();
  await addHeron(server);
});
afterAll(() => server.close());

const list = (query: Record<string, string | number> = {}) => server.ok('listUnits', { as: server.people.sales, query });
const numbersOf = ({ items }: { items: { number: number }[] }) => items.map(({ number }) => number);

test('When the first units are taken in, then they are numbered from 1 without a hole, also past a refused one', async () => {
  const first = await takeIn(server);
  await server.send('takeInUnit', { as: server.people.technician, body: newUnit({ plate: first.plate }) }).expect(409);
  const second = await takeIn(server);
  expect([first.number, second.number]).toEqual([1, 2]);
});

test('When a unit is taken in, then it holds what was told, who and when, under an id that sorts by time', async () => {
  const unit = await takeIn(server, { source: 'house clearance', costMinor: 2000 });
  const page = await server.ok('getUnit', { as: server.people.technician, params: { number: unit.number } });

  expect(page.unit).toEqual(unit);
  expect(unit).toMatchObject({
    source: 'house clearance',
    costMinor: 2000,
    licensedOnly: false,
    takenInAt: server.time.now.toISOString(),
    takenInBy: { name: 'Wil Tarrow' },
  });
  expect([unit.id, page.events[0]?.id].every((id) => validate(id) && version(id ?? '') === 7)).toBe(true); // RFC 9562, 5.7
  expect(page.events).toMatchObject([{ kind: 'intake', complaint: unit.complaint }]);
  expect(page.stage).toBe('intake');
});

test('When an id is made of the parts that RFC 9562 gives, then it is written as there', () => {
  // RFC 9562, A.6: 2022-02-22T14:22:22-05:00, rand_a CC3, rand_b 0b01 and 8C4DC0C0C07398F.
  const seq = ((0xcc3 << 20) | (0x18 << 14) | (0xc4 << 6) | 0x37) >>> 0;
  const random = Uint8Array.from([0, 0, 0, 0, 0, 0, 0, 0, 0, 0, 0, 0x0c, 0x0c, 0x07, 0x39, 0x8f]);
  expect(newId({ msecs: Date.parse('2022-02-22T14:22:22-05:00'), seq, random })).toBe('017f22e2-79b0-7cc3-98c4-dc0c0c07398f');
});

test('When the control family has no sheet, then it is 422; when none is told, then it is taken in', async () => {
  const problem = problemIn(await server.send('takeInUnit', { as: server.people.technician, body: newUnit({ family: 'plover-p4' }) }));
  expect(problem).toMatchObject({ status: 422, errors: [{ pointer: '/family' }] });
  const { family: _family, ...without } = newUnit();
  const unit = await server.ok('takeInUnit', { as: server.people.technician, body: without });
  expect(unit.family).toBeUndefined();
  expect((await list({ find: String(unit.number) })).items[0]?.waitsFor).toBe('A control family with a service sheet.');
});

describe('A unit that was taken in without a control family', () => {
  const give = (number: number, family: string) =>
    server.send('giveFamily', { params: { number }, as: server.people.technician, body: { family } });

  test('When it is given one, then its page and its rules go by that sheet, and it can’t be given another', async () => {
    const { number } = await takeIn(server, { family: undefined });
    const ask = () => server.ok('getUnit', { as: server.people.sales, params: { number } });
    expect((await ask()).readiness.rules.find(({ id }) => id === 'checks')?.how).toBe(
      'Give the unit a control family with a service sheet.',
    );
    expect((await give(number, 'heron-h6')).body).toMatchObject({ number, family: 'heron-h6' });
    const page = await ask();
    expect(page.unit.family).toBe('heron-h6');
    expect(page.readiness.rules.find(({ id }) => id === 'checks')).toMatchObject({ state: 'missing', evidence: '0 of 3' });
    await passDeadTests(server, number);
    expect(problemIn(await give(number, 'heron-h6'))).toMatchObject({ status: 409, kind: 'conflict' });
  });

  test('When the shop has no sheet for it, then it is 422, and the work that needs one says how to give it', async () => {
    const { number } = await takeIn(server, { family: undefined });
    expect(problemIn(await give(number, 'plover-p4'))).toMatchObject({ status: 422, errors: [{ pointer: '/family' }] });
    const reading = await server.send('recordReading', {
      params: { number },
      as: server.people.technician,
      body: newReading(server, 'heater'),
    });
    expect(problemIn(reading).detail).toContain(`refettle unit family ${String(number).padStart(4, '0')} FAMILY`);
  });
});

test.each(['gas hob', 'fridge', 'microwave oven'] as const)(
  'When a %s is taken in, then it is for a licensed person only',
  async (appliance) => {
    const unit = await takeIn(server, { appliance });
    expect(unit.licensedOnly).toBe(true);
    const page = await server.ok('getUnit', { as: server.people.technician, params: { number: unit.number } });
    expect(page.energising).toMatchObject({ open: false, reasons: ['gas, sealed refrigerant or a microwave oven: licensed person only'] });
  },
);

describe('The same serial number again', () => {
  const plate = (serial: string) => ({ ...newUnit().plate, serial });

  test('When it is read with other blanks, hyphens and case, then it is 409 and names the units', async () => {
    const first = await takeIn(server, { plate: plate('ab 12-34') });
    const response = await server.send('takeInUnit', { as: server.people.technician, body: newUnit({ plate: plate(' AB1 2–34') }) });
    expect(problemIn(response)).toMatchObject({ status: 409, kind: 'same-serial', units: [first.number] });
  });

  test('When it is taken in with a reason, then both pages say so', async () => {
    const first = await takeIn(server, { plate: plate('CD 1') });
    const second = await takeIn(server, { plate: plate('cd1'), sameSerialReason: 'bought back' });
    expect(second.sameSerial).toEqual({ reason: 'bought back', units: [first.number] });
    const page = await server.ok('getUnit', { as: server.people.technician, params: { number: first.number } });
    expect(page.unit.sameSerial).toEqual({ reason: 'bought back', units: [second.number] });
    const third = await takeIn(server, { plate: plate('CD1'), sameSerialReason: 'other' });
    expect(third.sameSerial?.units).toEqual([first.number, second.number]);
  });

  test('When a serial number is empty or only blanks, then it is nobody’s', async () => {
    await takeIn(server, { plate: plate(' - ') });
    await takeIn(server, { plate: plate('--') });
    await takeIn(server, { plate: plate('') });
  });

  test('When it is taken in again while a repair holds both of its units, then neither waits for the other for ever', async () => {
    const first = await takeIn(server, { plate: plate('LOCK 1') });
    const second = await takeIn(server, { plate: plate('LOCK 1'), sameSerialReason: 'other' });
    // PostgreSQL would come upon the second one first: the row of the first one was written again later.
    await server.ok('recordInspection', { as: server.people.technician, params: { number: first.number }, body: newInspection(server) });
    const { db } = server.deps;
    const lock = (trx: typeof db, number: number) => trx('units').where({ number }).forUpdate().select('id');
    const waiting = async (): Promise<boolean> => (await db('pg_locks').where({ granted: false }).first('pid')) !== undefined;

    const repair = await db.transaction();
    await lock(repair, first.number);
    const taken = server.ok('takeInUnit', {
      as: server.people.technician,
      body: newUnit({ plate: plate('LOCK 1'), sameSerialReason: 'other' }),
    });
    await expect.poll(waiting).toBe(true);
    await lock(repair, second.number);
    await repair.commit();
    expect((await taken).sameSerial?.units).toEqual([first.number, second.number]);
  });

  test('When two take in one serial number at the same moment, then one of them is warned', async () => {
    const answers = await Promise.all(
      [1, 2].map(() => server.send('takeInUnit', { as: server.people.technician, body: newUnit({ plate: plate('RACE 1') }) })),
    );
    expect(answers.map(({ status }) => status).sort()).toEqual([201, 409]);
  });
});

describe('The list', () => {
  test('When it is paged while others take units in, then each unit comes once, newest first', async () => {
    for (let i = 0; i < 5; i += 1) await takeIn(server);
    const before = numbersOf(await list({ limit: 200 }));
    const seen: number[] = [];
    let cursor: string | undefined;
    do {
      const page = await list({ limit: 4, ...(cursor === undefined ? {} : { cursor }) });
      seen.push(...numbersOf(page));
      cursor = page.next;
      await takeIn(server);
    } while (cursor !== undefined);
    expect(seen).toEqual(before);
    expect(before).toEqual([...before].sort((a, b) => b - a));
  });

  test('When the last page is full, then there is no next one', async () => {
    const all = numbersOf(await list({ limit: 200 }));
    expect((await list({ limit: all.length })).next).toBeUndefined();
    expect((await list({ limit: all.length - 1 })).next).toBeDefined();
  });

  test('When something is looked for, then number, serial, maker, model and code all find it', async () => {
    const unit = await takeIn(server, { plate: { ...newUnit().plate, maker: 'Tarnwell', model: 'TD 80_%', serial: 'zz-77 A' } });
    await passDeadTests(server, unit.number);
    await server.ok('recordCapture', { as: server.people.technician, params: { number: unit.number }, body: newCapture(server, 'G5K3') });
    for (const find of [
      String(unit.number),
      `00${String(unit.number)}`,
      `No. ${String(unit.number)}`,
      'zz77a',
      'tarnwell',
      'well td',
      '80_%',
      'g5k3',
      ' G5K3 ',
    ]) {
      expect(numbersOf(await list({ find })), find).toContain(unit.number);
    }
    for (const find of ['G2K9', 'zz78', '%%%', 'TD 80%_', '\\']) expect(numbersOf(await list({ find })), find).not.toContain(unit.number);
  });

  test('When a row is read, then it shows what stands at arm’s length', async () => {
    const unit = await takeIn(server);
    const row = async () => (await list({ find: String(unit.number) })).items.find((one) => one.number === unit.number);
    expect(await row()).toMatchObject({ stage: 'intake', rulesMet: 0, rulesTotal: 5, lamps: { state: 'not captured', codes: [] } });
    await passDeadTests(server, unit.number);
    await server.ok('recordCapture', { as: server.people.technician, params: { number: unit.number }, body: newCapture(server, 'G5K3') });
    const shown = await row();
    expect(shown).toMatchObject({ stage: 'testing', lamps: { state: 'codes' } });
    expect(shown?.lamps.codes).toMatchObject([{ code: 'G5K3', face: { code: 'G5K3', rows: [{ digit: 5 }, { digit: 3 }] } }]);
    await server.ok('recordCapture', { as: server.people.technician, params: { number: unit.number }, body: newCapture(server) });
    expect((await row())?.lamps.state).toBe('no code');
  });

  test('When a stage is asked for, then the rows are the ones whose page says the same', async () => {
    const mended = await takeIn(server);
    await server.ok('recordRun', { as: server.people.technician, params: { number: mended.number }, body: newRun(server, 'h6-mend') });
    pass(server, 30);
    const { unit: signed } = await signedOffUnit(server);
    for (const [stage, number] of [
      ['repair', mended.number],
      ['signed off', signed.number],
    ] as const) {
      const page = await list({ stage, limit: 200 });
      expect(numbersOf(page)).toContain(number);
      for (const row of page.items) {
        expect(row.stage).toBe(stage);
        expect((await server.ok('getUnit', { as: server.people.sales, params: { number: row.number } })).stage).toBe(stage);
      }
    }
    const waits = (await list({ stage: 'signed off' })).items.find((row) => row.number === signed.number);
    expect(waits).toMatchObject({ waitsFor: 'Its sale.', rulesMet: 5, tag: { standing: 'stands' } });
    expect((await list({ stage: 'no such stage' })).items).toEqual([]);
  });

  test('When a page has many units, then the number of queries does not grow with them', async () => {
    let queries = 0;
    const count = (): void => void (queries += 1);
    server.deps.db.on('query', count);
    await list({ limit: 1 });
    const forOne = queries;
    queries = 0;
    await list({ limit: 50 });
    server.deps.db.removeListener('query', count);
    expect(queries).toBe(forOne);
  });
});
