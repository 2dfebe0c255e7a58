import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import { verify } from '@node-rs/argon2';
import { addHeron, newCapture, newRepair, newRun, newUnit, passDeadTests, takeIn } from '../../helpers/factories.js';
import { benchAlone, cheapHash, givePin, makeBench, PIN, standsAt, type TestBench } from '../../helpers/shared-bench.js';
import { problemIn, startTestServer, type SignedInPerson, type TestServer } from '../../helpers/test-server.js';

let server: TestServer;
beforeAll(async () => {
  server = await startTestServer();
  await addHeron(server);
});
afterAll(() => server.close());

const MINUTE_MS = 60_000;
const audited = async (what: string): Promise<{ subject_name: string; who_name: string; after: unknown; text: string }[]> => {
  const rows = (await server.deps.db('audit_log').where({ what }).orderBy('position')) as Record<string, unknown>[];
  return rows.map((row) => ({
    ...{ subject_name: String(row['subject_name']), who_name: String(row['who_name']) },
    ...{ after: row['after'], text: JSON.stringify(row) },
  }));
};
const signOn = (bench: TestBench, body: object) => server.send('signOnAtBench', { as: benchAlone(bench), body });

describe('Benches', () => {
  test('When a lead makes one, then its token is in that answer, and afterwards nowhere', async () => {
    const { bench, token } = await server.ok('createBench', { as: server.people.lead, body: { name: 'bench 1' } });
    expect(token).toMatch(/^bench_[\w-]{43}$/); // 256 bits in base64url, RFC 4648 section 5
    expect(bench).toMatchObject({ name: 'bench 1', madeBy: { name: 'Maren Holt' }, people: [] });
    const { text } = await server.send('listBenches', { as: server.people.admin });
    expect(text).toContain('bench 1');
    expect(text).not.toContain(token);
    const [row] = (await server.deps.db('benches').where({ id: bench.id })) as { token_hash: Buffer }[];
    expect(row?.token_hash).toHaveLength(32); // SHA-256
    expect(await audited('bench.made')).toMatchObject([{ subject_name: 'bench 1', who_name: 'Maren Holt' }]);
  });

  test('When two get the same name, then the second is a conflict, whatever its case and blanks', async () => {
    await makeBench(server, 'Window bench');
    const again = await server.send('createBench', { as: server.people.lead, body: { name: ' window  BENCH ' } });
    expect(problemIn(again)).toMatchObject({ status: 409, kind: 'conflict' });
  });

  test('When a bench is revoked, then it is refused with words, and only a new token lets it in again', async () => {
    const bench = await makeBench(server);
    await server.ok('ownBench', { as: benchAlone(bench) });
    const revoked = await server.ok('revokeBench', { as: server.people.lead, params: { id: bench.id } });
    expect(revoked.revokedAt).toBeDefined();

    const refused = problemIn(await server.send('ownBench', { as: benchAlone(bench) }));
    expect(refused).toMatchObject({ status: 401, kind: 'not-signed-in' });
    expect(refused.detail).toMatch(/was revoked.*lead or an admin/);

    const renewed = await server.ok('renewBenchToken', { as: server.people.admin, params: { id: bench.id } });
    expect(renewed.bench.revokedAt).toBeUndefined();
    expect((await server.send('ownBench', { as: benchAlone(bench) })).status).toBe(401);
    expect((await server.ok('ownBench', { as: benchAlone({ ...bench, token: renewed.token }) })).bench).toEqual({
      id: bench.id,
      name: bench.name,
    });
    expect((await audited('bench.revoked')).map(({ subject_name }) => subject_name)).toContain(bench.name);
    expect((await audited('bench.token-renewed')).map(({ subject_name }) => subject_name)).toContain(bench.name);
  });

  test('When a bench calls, then it is seen, to the minute; when it says what hangs on it, then the list shows that', async () => {
    const bench = await makeBench(server);
    const rig = { name: 'bench 1', instruments: [{ id: 'M-03', kind: 'meter', identification: 'Millrace,BM-4,0,1.0' }] };
    await server.ok('reportRig', { as: benchAlone(bench), body: rig });
    const seenAt = server.time.now;
    server.time.now = new Date(seenAt.getTime() + MINUTE_MS / 2);
    await server.ok('ownBench', { as: benchAlone(bench) });
    const listed = (await server.ok('listBenches', { as: server.people.lead })).items.find(({ id }) => id === bench.id);
    expect(listed).toMatchObject({ lastSeenAt: seenAt.toISOString(), rig, rigReportedAt: seenAt.toISOString() });
  });

  test('When a bench’s token comes by cookie, then it is refused: a browser is no bench', async () => {
    const bench = await makeBench(server);
    const response = await server.send('ownBench').set('Cookie', `refettle_session=${bench.token}`);
    expect(problemIn(response)).toMatchObject({ status: 401 });
  });
});

describe('Sign-on', () => {
  let bench: TestBench;
  let wil: SignedInPerson;
  beforeAll(async () => {
    bench = await makeBench(server, 'sign-on bench');
    wil = await server.addPerson('technician', 'Bran Oakley');
    await givePin(server, wil);
  });

  test('When name and PIN fit, then the bench gets the person and a verifier of its own, and offers the name from then on', async () => {
    expect((await server.ok('ownBench', { as: benchAlone(bench) })).people).toEqual([]);
    const { person, verifier } = await server.ok('signOnAtBench', { as: benchAlone(bench), body: { name: '  bran  OAKLEY ', pin: PIN } });
    expect(person).toEqual({ id: wil.id, name: wil.name, role: 'technician', pinSetAt: expect.any(String) as string });
    expect(verifier).toMatch(/^\$argon2id\$/); // RFC 9106
    expect(await verify(verifier, PIN)).toBe(true);
    const [row] = (await server.deps.db('people').where({ id: wil.id })) as { pin_hash: string }[];
    expect(verifier).not.toBe(row?.pin_hash);

    const offered = await server.send('ownBench', { as: benchAlone(bench) });
    expect(offered.text).toContain(wil.name);
    expect(offered.text).not.toContain(wil.email);
    expect((await audited('bench.first-sign-on')).at(-1)).toMatchObject({ subject_name: 'sign-on bench', who_name: wil.name });
  });

  test('When the name is nobody’s, the PIN is wrong, or none is set, then the refusal is the same to the letter', async () => {
    const without = await server.addPerson('technician', 'Pinless Peat');
    const gone = await server.addPerson('technician', 'Gone Grey');
    await givePin(server, gone);
    await server.deps.db('people').where({ id: gone.id }).update({ active: false });
    const bodies = [
      { name: 'Nobody Here', pin: PIN },
      { name: wil.name, pin: '1379' },
      { name: without.name, pin: PIN },
      { name: gone.name, pin: PIN },
      { person: server.people.sales.id, pin: PIN },
      { name: wil.name, pin: 'no digits' },
    ];
    const texts = new Set<string>();
    for (const body of bodies) {
      const refused = await signOn(bench, body);
      expect(problemIn(refused)).toMatchObject({ status: 422, errors: [{ pointer: '/pin' }] });
      texts.add(refused.text);
    }
    expect(texts.size).toBe(1);
    const failed = (await audited('bench.sign-on-failed')).slice(-bodies.length);
    expect(failed.map(({ subject_name: at, who_name: who, after }) => [at, who, after])).toEqual(
      bodies.map(({ name }) => [
        'sign-on bench',
        'null',
        name === wil.name ? { name: wil.name, person: wil.id, why: 'wrong PIN' } : { why: 'nobody, or no PIN' },
      ]),
    );
  });

  test('When two have the same name, then neither is guessed at, and the e-mail address tells them apart', async () => {
    const [one, two] = [await server.addPerson('technician', 'Same Name'), await server.addPerson('lead', 'Other Name')];
    await server.deps.db('people').where({ id: two.id }).update({ name: 'Same Name' });
    for (const person of [one, two]) await givePin(server, person);
    expect((await signOn(bench, { name: 'Same Name', pin: PIN })).status).toBe(422);
    expect((await server.ok('signOnAtBench', { as: benchAlone(bench), body: { name: two.email, pin: PIN } })).person.id).toBe(two.id);
  });

  test('When sales or an admin signs on, then that is refused with words: a bench is not theirs', async () => {
    await givePin(server, server.people.sales);
    const refused = problemIn(await signOn(bench, { person: server.people.sales.id, pin: PIN }));
    expect(refused).toMatchObject({ status: 403, kind: 'role' });
    expect(refused.detail).toContain('technicians and leads');
  });

  test('When a PIN is guessed at, then the sixth try is 429, by name, address or id and at whichever bench, even with the right PIN', async () => {
    const target = await server.addPerson('technician', 'Guessed At');
    await givePin(server, target);
    const other = await makeBench(server);
    const ways = [{ name: target.name }, { name: target.email }, { person: target.id }, { name: 'guessed  at' }, { person: target.id }];
    for (const [index, way] of ways.entries()) expect((await signOn(index % 2 ? other : bench, { ...way, pin: '9031' })).status).toBe(422);
    const sixth = await signOn(other, { person: target.id, pin: PIN });
    expect(problemIn(sixth)).toMatchObject({ status: 429, kind: 'too-many' });
    expect((await signOn(other, { person: wil.id, pin: PIN })).status).toBe(201);
  });
});

describe('Who acts', () => {
  test('When somebody has signed on, then what the bench sends stands in that name, with the role of now', async () => {
    const bench = await makeBench(server);
    const as = await standsAt(server, bench, server.people.technician);
    const { number, takenInBy } = await server.ok('takeInUnit', { as, body: newUnit() });
    expect(takenInBy).toMatchObject({ id: server.people.technician.id, role: 'technician' });
    expect((await server.ok('me', { as })).user.id).toBe(server.people.technician.id);
    const lead = await standsAt(server, bench, server.people.lead);
    const { event } = await server.ok('recordOverride', {
      as: lead,
      params: { number },
      body: { gate: 'dead tests', reason: 'the insulation tester is away' },
    });
    expect(event.by).toMatchObject({ id: server.people.lead.id, role: 'lead' });
  });

  test('When somebody signed on at another bench only, then this one may not act in that name', async () => {
    const [here, there] = [await makeBench(server), await makeBench(server)];
    const person = await server.addPerson('technician', 'Elsewhere Elm');
    await standsAt(server, there, person);
    const refused = problemIn(await server.send('takeInUnit', { as: { token: here.token, person: person.id }, body: newUnit() }));
    expect(refused).toMatchObject({ status: 403, kind: 'sign-on' });
    expect(refused.detail).toContain('has never signed on');
  });

  test('When the person was deactivated, then nothing more is taken down in that name, with words', async () => {
    const bench = await makeBench(server);
    const person = await server.addPerson('technician', 'Leaving Larch');
    const as = await standsAt(server, bench, person);
    await server.deps.db('people').where({ id: person.id }).update({ active: false });
    const refused = problemIn(await server.send('takeInUnit', { as, body: newUnit() }));
    expect(refused).toMatchObject({ status: 403, kind: 'role' });
    expect(refused.detail).toContain('Leaving Larch no longer works here');
    expect((await server.ok('ownBench', { as: benchAlone(bench) })).people).toEqual([]);
  });

  test('When the header comes with a person’s own token and names another, then it is refused; the own name is nothing new', async () => {
    const { token, id } = server.people.technician;
    const other = await server.send('me', { as: { token, person: server.people.lead.id } });
    expect(problemIn(other)).toMatchObject({ status: 403, kind: 'role' });
    expect((await server.send('me', { as: { token, person: id } })).status).toBe(200);
  });

  test('When the same work comes by the bench and by the person’s own token, then it is stored once: a key is the acting person’s', async () => {
    const bench = await makeBench(server);
    const as = await standsAt(server, bench, server.people.technician);
    const { number } = await takeIn(server);
    const call = { params: { number }, key: 'by-two-ways', body: newRepair(server) };
    const first = await server.send('recordRepair', { ...call, as });
    const again = await server.send('recordRepair', { ...call, as: server.people.technician });
    expect([first.status, again.status, again.headers['idempotency-replayed']]).toEqual([201, 201, 'true']);
    const lead = await standsAt(server, bench, server.people.lead);
    // Another person at the same bench is another matter: the key says nothing there, the id of the work does.
    expect(problemIn(await server.send('recordRepair', { ...call, as: lead }))).toMatchObject({ status: 409 });
  });
});

describe('The bench that it was recorded at', () => {
  const benchesOf = async (table: string, unit: number): Promise<(string | null)[]> =>
    server.deps
      .db(table)
      .join('units', 'units.id', `${table}.unit_id`)
      .where({ number: unit })
      .orderBy(table === 'unit_events' ? 'position' : `${table}.id`)
      .pluck<(string | null)[]>(`${table}.bench_id`);

  test('When a lead renews a token, then it acts for nobody who signed on before: everybody gives the PIN again', async () => {
    const bench = await makeBench(server);
    const worker = await server.addPerson('technician', 'Renewed Rowan');
    await standsAt(server, bench, worker);
    const { number } = await takeIn(server);
    const { token } = await server.ok('renewBenchToken', { as: server.people.lead, params: { id: bench.id } });
    const as = { token, person: worker.id };
    const refused = problemIn(await server.send('recordRepair', { as, params: { number }, body: newRepair(server) }));
    expect(refused).toMatchObject({ status: 403, kind: 'sign-on' });
    expect((await server.ok('ownBench', { as: benchAlone({ ...bench, token }) })).people).toEqual([]);
    await standsAt(server, { ...bench, token }, worker);
    expect((await server.send('recordRepair', { as, params: { number }, body: newRepair(server) })).status).toBe(201);
  });

  test('When events, captures and runs come by a bench’s token, then the bench stands with them; by an own sign-in, none does', async () => {
    const bench = await makeBench(server);
    const as = await standsAt(server, bench, server.people.technician);
    const { number } = await takeIn(server);
    await passDeadTests(server, number);
    const before = (await benchesOf('unit_events', number)).length;
    expect(new Set(await benchesOf('unit_events', number))).toEqual(new Set([null]));
    await server.ok('recordCapture', { as, params: { number }, body: newCapture(server) });
    await server.ok('recordRun', { as, params: { number }, body: newRun(server, 'h6-find') });
    await server.ok('recordRepair', { params: { number }, as: server.people.technician, body: newRepair(server) });
    const events = (await benchesOf('unit_events', number)).slice(before);
    expect(events.at(-1)).toBeNull();
    expect(new Set(events.slice(0, -1))).toEqual(new Set([bench.id]));
    expect(await benchesOf('captures', number)).toContain(bench.id);
    expect(await benchesOf('runs', number)).toEqual([bench.id]);
  });
});

describe('PINs', () => {
  const PASSWORD = 'long enough to be one';
  test('When somebody sets the own PIN, then the own password is asked', async () => {
    const person = await server.addPerson('technician', 'Own Pinner');
    await server.deps
      .db('people')
      .where({ id: person.id })
      .update({ password_hash: await cheapHash(PASSWORD) });
    expect(await server.ok('getOwnPin', { as: person })).toEqual({ person: { id: person.id, name: person.name, role: 'technician' } });
    const wrong = await server.send('setOwnPin', { as: person, body: { password: 'not the password', pin: '40719' } });
    expect(problemIn(wrong)).toMatchObject({ status: 422, errors: [{ pointer: '/password' }] });
    expect((await audited('person.wrong-password')).at(-1)).toMatchObject({ who_name: person.name, after: { wanted: 'a PIN' } });
    expect(await server.ok('setOwnPin', { as: person, body: { password: PASSWORD, pin: '40719' } })).toMatchObject({
      pinSetAt: server.time.now.toISOString(),
    });
    const bench = await makeBench(server);
    expect((await signOn(bench, { name: person.name, pin: '40719' })).status).toBe(201);
    expect((await audited('pin.set')).at(-1)).toMatchObject({ subject_name: person.name, who_name: person.name });
    expect((await audited('pin.set')).at(-1)?.text).not.toContain('40719');
  });

  test.each(['123', '123456789', '12a4', '1111', '4567', '98765', ''])('When the PIN is %j, then it is refused', async (pin) => {
    const refused = await server.send('setPin', { as: server.people.lead, params: { id: server.people.technician.id }, body: { pin } });
    expect(problemIn(refused)).toMatchObject({ status: 422, errors: [{ pointer: '/pin' }] });
  });

  test('When a lead sets somebody’s PIN, then the list and the audit log say who did; nobody sees the PIN', async () => {
    const person = await server.addPerson('technician', 'Set By Lead');
    const call = { as: server.people.lead, params: { id: person.id } };
    expect(await server.ok('setPin', { ...call, body: { pin: '40719' } })).toMatchObject({ pinSetBy: 'Maren Holt' });
    const listed = await server.send('listPins', { as: server.people.admin, query: { limit: 200 } });
    expect(listed.text).toContain('Set By Lead');
    expect(listed.text).not.toMatch(/40719|argon2/);
    expect((await audited('pin.set')).at(-1)).toMatchObject({ subject_name: 'Set By Lead', who_name: 'Maren Holt' });

    expect((await server.ok('clearPin', call)).pinSetAt).toBeUndefined();
    expect((await audited('pin.cleared')).at(-1)).toMatchObject({ subject_name: 'Set By Lead' });
    const bench = await makeBench(server);
    expect((await signOn(bench, { name: person.name, pin: '40719' })).status).toBe(422);
  });

  test.each(['lead', 'admin'] as const)('When a %s sets the own PIN without the own password, then it is refused', async (role) => {
    const person = await server.addPerson(role, `Own ${role}`);
    const refused = await server.send('setPin', { as: person, params: { id: person.id }, body: { pin: '40719' } });
    expect(problemIn(refused)).toMatchObject({ status: 403, kind: 'role' });
    expect((await server.ok('getOwnPin', { as: person })).pinSetAt).toBeUndefined();
  });

  test('When a PIN is set anew, then a bench that knows the old one can tell', async () => {
    const person = await server.addPerson('technician', 'Changing Chestnut');
    const bench = await makeBench(server);
    await standsAt(server, bench, person);
    const pinSetAt = async () =>
      (await server.ok('ownBench', { as: benchAlone(bench) })).people.find(({ id }) => id === person.id)?.pinSetAt;
    const before = await pinSetAt();
    server.time.now = new Date(server.time.now.getTime() + 1);
    await server.ok('setPin', { as: server.people.lead, params: { id: person.id }, body: { pin: '40719' } });
    expect(await pinSetAt()).not.toBe(before);
    await server.ok('clearPin', { as: server.people.lead, params: { id: person.id } });
    expect(await pinSetAt()).toBeUndefined();
  });

  test('When somebody who left gets a PIN, then there is no such person', async () => {
    const person = await server.addPerson('technician', 'Left Before');
    await server.deps.db('people').where({ id: person.id }).update({ active: false });
    const refused = await server.send('setPin', { as: server.people.lead, params: { id: person.id }, body: { pin: '40719' } });
    expect(problemIn(refused)).toMatchObject({ status: 404 });
  });

  test('When the own password is guessed at by way of the PIN, then the eleventh try is 429', async () => {
    const person = await server.addPerson('technician', 'Left Alone');
    const statuses: number[] = [];
    for (let tries = 0; tries < 11; tries += 1)
      statuses.push((await server.send('setOwnPin', { as: person, body: { password: `guess ${tries}`, pin: '40719' } })).status);
    expect(statuses).toEqual([...Array<number>(10).fill(422), 429]);
  });
});
