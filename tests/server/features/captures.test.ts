import { readFileSync } from 'node:fs';
import { v4 as anyId } from 'uuid';
import { afterAll, beforeAll, expect, test } from 'vitest';
import { addHeron, newCapture, passDeadTests, takeIn } from '../../helpers/factories.js';
import { problemIn, startTestServer, type TestServer } from '../../helpers/test-server.js';

let server: TestServer;
beforeAll(async () => {
  server = await startTestServer();
  await addHeron(server);
});
afterAll(() => server.close());

const example = (name: string): string =>
  readFileSync(new URL(`../../fixtures/examples/captures/${name}.lamps.ndjson`, import.meta.url), 'utf8');
const send = (number: number, change: object, as = server.people.technician) =>
  server.send('recordCapture', {
    params: { number },
    as,
    body: { id: anyId(), at: server.time.now.toISOString(), fromFile: true, ...change },
  });

test('When an example capture is sent, then the server says the codes that its answer beside it has', async () => {
  const { number } = await takeIn(server);
  for (const [name, codes] of [
    ['01-one-code', ['G5K3']], // tests/fixtures/examples/decode.json
    ['02-two-codes', ['G5K3', 'G2K9']],
  ] as const) {
    const response = await send(number, { file: example(name) });
    expect(response.status).toBe(201);
    expect((response.body as { answer: { codes: { code: string }[] } }).answer.codes.map(({ code }) => code)).toEqual(codes);
  }
});

test.each([
  ['60-empty', 'is empty'],
  ['61-no-header', 'line 1'],
  ['62-other-version', 'line 1'],
  ['64-levels-short', 'line'],
  ['65-time-falls', 'line'],
  ['67-level-text', 'line'],
  ['69-after-end', 'line'],
  ['70-not-json', 'line'],
])('When the bad example %s is sent, then it is 422 and names the line in the file', async (name, words) => {
  const { number } = await takeIn(server);
  const problem = problemIn(await send(number, { file: example(name) }));
  expect(problem).toMatchObject({ status: 422, errors: [{ pointer: '/file' }] });
  expect(problem.errors?.[0]?.reason).toContain(words);
});

test('When the header holds a character that no database keeps, then it is 422', async () => {
  const { number } = await takeIn(server);
  const file = example('01-one-code').replace('{"format"', '{"unit":"\\u0000","format"');
  expect(problemIn(await send(number, { file }))).toMatchObject({ status: 422, errors: [{ pointer: '/file' }] });
});

test('When the bench’s clock is more than 10 minutes ahead, then it is refused and says to set it; else it would be newer than a repair to come', async () => {
  const { number } = await takeIn(server);
  const ahead = (milliseconds: number): string => new Date(server.time.now.getTime() + milliseconds).toISOString();
  const recorded = (at: string): string => example('01-one-code').replace(/"capturedAt":"[^"]+"/, `"capturedAt":"${at}"`);
  for (const [change, pointer] of [
    [{ file: recorded(ahead(600_001)) }, '/file'],
    [{ file: example('01-one-code'), at: ahead(600_001) }, '/at'],
  ] as const) {
    const problem = problemIn(await send(number, change));
    expect(problem).toMatchObject({ status: 422, errors: [{ pointer }] });
    expect(problem.errors?.[0]?.reason).toContain('set the clock of the bench');
  }
  await send(number, { file: recorded(ahead(600_000)), at: ahead(600_000) }).expect(201);
});

test('When one capture id is sent again under another key, then it is a conflict', async () => {
  const { number } = await takeIn(server);
  const id = anyId();
  expect((await send(number, { id, file: example('01-one-code') })).status).toBe(201);
  expect(problemIn(await send(number, { id, file: example('01-one-code') })).status).toBe(409);
});

test('When the unit has no sheet, then nothing can decode its lamps', async () => {
  const { number } = await takeIn(server, { family: undefined });
  expect(problemIn(await send(number, { file: example('01-one-code') })).status).toBe(422);
});

test('When a live capture is sent after the dead tests, then its page has the file to the letter and the faces of its codes', async () => {
  const { number } = await takeIn(server);
  await passDeadTests(server, number);
  const body = newCapture(server, 'G5K3');
  const { id } = await server.ok('recordCapture', { params: { number }, as: server.people.technician, body });
  const page = await server.ok('getCapture', { as: server.people.sales, params: { id } });
  expect(page.file).toBe(body.file);
  expect(page).toMatchObject({
    by: { name: 'Wil Tarrow' },
    capture: { source: 'probe', fromFile: false },
    faces: {
      G5K3: {
        rows: [
          { letter: 'G', digit: 5 },
          { letter: 'K', digit: 3 },
        ],
      },
    },
  });
  expect(page.runId).toBeUndefined();
});
