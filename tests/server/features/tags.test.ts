import request from 'supertest';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import type { PublicTag } from '../../../shared/api/tags.js';
import { createApp } from '../../../server/app.js';
import { isLoopback } from '../../../server/loopback.js';
import { addHeron, mendAndProve, newReading, pass, rulesSeen, signedOffUnit, takeIn } from '../../helpers/factories.js';
import { problemIn, startTestServer, type TestServer } from '../../helpers/test-server.js';

let server: TestServer;
beforeAll(async () => {
  server = await startTestServer();
  await addHeron(server);
});
afterAll(() => server.close());

const signOff = (number: number, body: object, as = server.people.lead) => server.send('signOff', { params: { number }, as, body });
const look = (tag: string, query: Record<string, string | undefined>): Promise<PublicTag> =>
  server.ok('getPublicTag', { params: { tag }, query });
const readyUnit = async (): Promise<number> => {
  const { number } = await takeIn(server);
  await mendAndProve(server, number);
  return number;
};

describe('Sign-off', () => {
  test('When rules are not met, then it is 403 and each missing rule says how to get it', async () => {
    const { number } = await takeIn(server);
    const problem = problemIn(await signOff(number, await rulesSeen(server, number)));
    expect(problem).toMatchObject({ status: 403, kind: 'gate' });
    expect(problem.errors?.map(({ reason }) => reason.split(':')[0])).toEqual([
      'Checks passed',
      'No code, proved',
      'Calibration run after the last part swap',
      'Electrical safety test',
    ]);
    expect(problem.errors?.every(({ reason }) => /\. \w.+\.$/.test(reason))).toBe(true);
  });

  test('When the lead saw other rules than stand now, then it is 409 and nothing is signed', async () => {
    const number = await readyUnit();
    const seen = await rulesSeen(server, number);
    await server.ok('recordReading', { params: { number }, as: server.people.technician, body: newReading(server, 'heater', 31) });
    expect(problemIn(await signOff(number, seen))).toMatchObject({
      status: 409,
      kind: 'conflict',
      detail: expect.stringContaining('Checks passed is now fail') as unknown,
    });
    expect(problemIn(await signOff(number, { seen: [] })).status).toBe(409);
    expect((await server.send('getUnitTag', { params: { number }, as: server.people.lead })).status).toBe(404);
  });

  test('When it is signed, then the tag says what was tested, mended and by whom, by first names, and the stage follows', async () => {
    const number = await readyUnit();
    const tag = await server.ok('signOff', { params: { number }, as: server.people.lead, body: await rulesSeen(server, number) });

    expect(tag.content).toMatchObject({
      tag: `${String(number).padStart(4, '0')}-1`,
      sample: false,
      appliance: 'washing machine',
      signedOffBy: 'Maren',
      fourEyes: true,
      warrantyMonths: 12,
      mended: [{ part: 'Drain pump', source: 'new', by: 'Wil' }],
      shop: { name: 'Millrace Mend', address: '12 Dyehouse Yard', phone: '01632 960412' },
    });
    expect(tag.content.tested.map(({ title, reading, spread }) => [title, reading, spread])).toContainEqual([
      'Drain pump winding',
      '157.7 Ω',
      '±1.3',
    ]);
    expect(JSON.stringify(tag.content)).not.toMatch(/Tarrow|Holt/);
    expect(tag.content.lookUpWord).toMatch(/^[2-9BCDFGHJKMNPQRSTVWXZ]{4}$/);
    expect(tag.url).toBe(`https://tags.millrace.example/t/${tag.content.tag}/${tag.jws.split('.')[2] ?? ''}`);
    const page = await server.ok('getUnit', { params: { number }, as: server.people.sales });
    expect(page).toMatchObject({ stage: 'signed off', tag: { standing: 'stands' } });
    expect(page.events.at(-1)).toMatchObject({ kind: 'sign-off', rulesMet: 5, fourEyes: true, by: { name: 'Maren Holt' } });
  });

  test('When a tag stands already, then it is 409; after its end the next one counts on', async () => {
    const { unit, tag } = await signedOffUnit(server);
    const seen = await rulesSeen(server, unit.number);
    expect(problemIn(await signOff(unit.number, seen)).status).toBe(409);
    await server.ok('withdrawTag', { params: { tag: tag.content.tag }, as: server.otherLead, body: { reason: 'price label mixed up' } });
    const next = await server.ok('signOff', {
      params: { number: unit.number },
      as: server.people.lead,
      body: await rulesSeen(server, unit.number),
    });
    expect(next.content.tag).toBe(tag.content.tag.replace(/-1$/, '-2'));
    expect((await look(tag.content.tag, { word: tag.content.lookUpWord })).standing).toBe('withdrawn');
    expect((await look(next.content.tag, { word: next.content.lookUpWord })).standing).toBe('stands');
  });

  test('When two leads sign at the same moment, then one tag stands', async () => {
    const number = await readyUnit();
    const seen = await rulesSeen(server, number);
    const answers = await Promise.all([signOff(number, seen), signOff(number, seen, server.otherLead)]);
    expect(answers.map(({ status }) => status).sort()).toEqual([201, 409]);
  });

  test('When a failed reading races with the sign-off, then no tag is left standing beside it', async () => {
    for (let round = 0; round < 4; round += 1) {
      const number = await readyUnit();
      const seen = await rulesSeen(server, number);
      const reading = { params: { number }, as: server.people.technician, body: newReading(server, 'heater', 31) };
      const both = [() => signOff(number, seen), () => server.send('recordReading', reading)];
      if (round % 2 === 1) both.reverse();
      const answers = await Promise.all(both.map((send) => send()));
      expect(answers.every(({ status }) => [201, 403, 409].includes(status))).toBe(true);
      const page = await server.ok('getUnit', { params: { number }, as: server.people.lead });
      expect(page.tag?.standing).not.toBe('stands');
      expect(page.stage).not.toBe('signed off');
    }
  });
});

describe('Withdrawal', () => {
  test('When a lead withdraws it with a reason, then the tag and the history say so, once', async () => {
    const { unit, tag } = await signedOffUnit(server);
    const call = { params: { tag: tag.content.tag }, as: server.people.lead, body: { reason: '  the wrong machine was signed ' } };
    pass(server, 10);
    const withdrawn = await server.ok('withdrawTag', call);
    expect(withdrawn).toMatchObject({
      state: { standing: 'withdrawn' },
      withdrawn: { at: server.time.now.toISOString(), reason: 'the wrong machine was signed' },
    });
    expect(problemIn(await server.send('withdrawTag', call)).status).toBe(409);
    const page = await server.ok('getUnit', { params: { number: unit.number }, as: server.people.sales });
    expect(page).toMatchObject({ stage: 'proving', tag: { standing: 'withdrawn' } });
    expect(page.events.at(-1)).toMatchObject({ kind: 'tag withdrawn', tag: tag.content.tag, reason: 'the wrong machine was signed' });
    expect(page.readiness.rules.find(({ id }) => id === 'four-eyes')?.state).toBe('missing');
  });

  test('When there is no reason to speak of, then it is 422', async () => {
    expect(
      (await server.send('withdrawTag', { params: { tag: '0001-1' }, as: server.people.lead, body: { reason: '  x  ' } })).status,
    ).toBe(422);
  });
});

describe('The buyer’s look', () => {
  test('When signature or word fit, then it stands; when it was withdrawn, then it says so and not why', async () => {
    const { tag } = await signedOffUnit(server);
    const number = tag.content.tag;
    const signature = tag.jws.split('.')[2];
    for (const query of [
      { signature },
      { word: tag.content.lookUpWord },
      { word: ` ${tag.content.lookUpWord.toLowerCase()} ` },
      { signature, word: tag.content.lookUpWord },
    ]) {
      expect(await look(number, query)).toEqual({
        standing: 'stands',
        content: tag.content,
        checkedAt: server.time.now.toISOString(),
        jws: tag.jws,
      });
    }
    await server.ok('withdrawTag', {
      params: { tag: number },
      as: server.people.lead,
      body: { reason: 'a neighbour’s kitchen caught fire' },
    });
    const response = await server.send('getPublicTag', { params: { tag: number }, query: { signature } });
    expect(response.body).toMatchObject({ standing: 'withdrawn', withdrawnAt: server.time.now.toISOString() });
    expect(response.text).not.toContain('neighbour');
  });

  test('When number, signature or word are wrong or missing, then all get one answer that says nothing of any unit', async () => {
    const { tag } = await signedOffUnit(server);
    const other = await signedOffUnit(server);
    const signature = tag.jws.split('.')[2] ?? '';
    const flipped = `${signature.startsWith('A') ? 'B' : 'A'}${signature.slice(1)}`;
    const number = tag.content.tag;
    const asked: [string, Record<string, string>][] = [
      ['9999-1', { word: 'QQQQ' }],
      ['no such', { signature }],
      [number, {}],
      [number, { word: '' }],
      [number, { signature: '' }],
      [number, { word: 'QQQQ' }],
      [number, { signature: flipped }],
      [number, { signature: `${signature}A` }],
      [number, { signature, word: 'QQQQ' }],
      [number, { signature: flipped, word: tag.content.lookUpWord }],
      [other.tag.content.tag, { signature }],
      [number, { word: 'no tag' }],
      ['9999-1', { word: 'no tag' }],
    ];
    for (const [tagNumber, query] of asked) {
      expect(await look(tagNumber, query), JSON.stringify([tagNumber, query])).toEqual({
        standing: 'not ours',
        reason: 'There is no such tag, or its signature or look-up word is another.',
        checkedAt: server.time.now.toISOString(),
        shop: { name: 'Millrace Mend', address: '12 Dyehouse Yard', phone: '01632 960412' },
      });
    }
  });

  test('When somebody edits the stored tag, then its signature no longer covers it', async () => {
    const { unit, tag } = await signedOffUnit(server);
    const [head, payload, signature] = tag.jws.split('.') as [string, string, string];
    const content = JSON.parse(Buffer.from(payload, 'base64url').toString()) as { warrantyMonths: number };
    content.warrantyMonths = 60;
    const forged = [head, Buffer.from(JSON.stringify(content)).toString('base64url'), signature].join('.');
    await server.deps.db('tags').where({ unit_id: unit.id }).update({ jws: forged });
    expect((await look(tag.content.tag, { signature })).standing).toBe('not ours');

    // Editing only what the shop's own pages show does not change what a buyer is told.
    await server.deps
      .db('tags')
      .where({ unit_id: unit.id })
      .update({ jws: tag.jws, content: JSON.stringify({ ...tag.content, warrantyMonths: 60 }) });
    expect(await look(tag.content.tag, { signature })).toMatchObject({ content: { warrantyMonths: 12 } });
  });

  test('When a tag that is good for one machine is hung under another number, then it is none of ours', async () => {
    const one = await signedOffUnit(server);
    const other = await signedOffUnit(server);
    await server.deps.db('tags').where({ unit_id: other.unit.id }).update({ jws: one.tag.jws });
    expect((await look(other.tag.content.tag, { signature: one.tag.jws.split('.')[2] })).standing).toBe('not ours');
  });
});

describe('Where tags point to', () => {
  test('When the public address is unset or a loopback one outside the demo, then no tag is given out for printing', async () => {
    const { unit } = await signedOffUnit(server);
    const askedOf = (publicUrl: string | undefined) =>
      request(createApp({ ...server.deps, config: { ...server.deps.config, publicUrl } }))
        .get(`/api/units/${String(unit.number)}/tag`)
        .set('Authorization', `Bearer ${server.people.sales.token}`);
    for (const publicUrl of [undefined, 'http://127.0.0.1:4780', 'http://localhost:4780', 'http://[::1]:4780', 'http://127.8.8.8']) {
      const problem = problemIn(await askedOf(publicUrl));
      expect(problem).toMatchObject({ status: 409, remedy: expect.stringContaining('REFETTLE_PUBLIC_URL') as unknown });
    }
    expect((await askedOf('https://tags.millrace.example')).status).toBe(200);
  });

  test('When it is the demo shop, then the tag is given out all the same, and is a sample', async () => {
    const demo = await startTestServer({ shop: { demo: true }, config: { demo: true, publicUrl: undefined } });
    await addHeron(demo);
    const { unit } = await signedOffUnit(demo, { simulated: true });
    const tag = await demo.ok('getUnitTag', { params: { number: unit.number }, as: demo.people.sales });
    expect(tag.content.sample).toBe(true);
    expect(tag.url).toMatch(/^http:\/\/127\.0\.0\.1:\d+\/t\//);
    await demo.close();
  });

  test('When an address is one that only this machine reaches, then it is known as such', () => {
    // RFC 6890: 127.0.0.0/8 and ::1 are loopback; RFC 6761, 6.3: localhost and all names below it.
    expect(
      ['http://127.0.0.1', 'http://127.255.0.9:1', 'http://LOCALHOST', 'http://a.localhost', 'http://[::1]:5', 'http://0.0.0.0:4780'].every(
        isLoopback,
      ),
    ).toBe(true);
    expect(
      ['https://tags.millrace.example', 'http://192.168.1.5:4780', 'http://127.example.org', 'http://[2001:db8::1]'].some(isLoopback),
    ).toBe(false);
  });
});
