import { afterAll, beforeAll, expect, test } from 'vitest';
import { shopFileText } from '../../helpers/factories.js';
import { problemIn, startTestServer, type TestServer } from '../../helpers/test-server.js';

let server: TestServer;
beforeAll(async () => {
  server = await startTestServer();
});
afterAll(() => server.close());

const text = shopFileText('heron-h6.yaml');
const edition = (number: number, family = 'heron-h6') =>
  text.replace('edition: 1', `edition: ${String(number)}`).replace('family: heron-h6', `family: ${family}`);
const add = (sheet: string) => server.send('addSheet', { as: server.people.lead, body: { text: sheet } });
const get = (query: { edition?: number } = {}) =>
  server.ok('getSheet', { as: server.people.technician, params: { family: 'heron-h6' }, query });

test('When editions are added, then each must be the next one, and all are kept to the letter', async () => {
  expect(problemIn(await add(edition(2)))).toMatchObject({ status: 409, kind: 'conflict' });
  expect((await add(text)).body).toEqual({
    family: 'heron-h6',
    title: 'Heron H6',
    appliance: 'washing machine',
    edition: 1,
    at: server.time.now.toISOString(),
  });
  expect(problemIn(await add(text)).status).toBe(409);
  expect(problemIn(await add(edition(3))).remedy).toContain('edition: 2');
  const second = edition(2).replace('title: Heron H6', 'title: Heron H6 after the recall');
  expect((await add(second)).status).toBe(201);

  expect(await get()).toMatchObject({ editions: [1, 2], text: second, sheet: { edition: 2, title: 'Heron H6 after the recall' } });
  expect(await get({ edition: 1 })).toMatchObject({ editions: [1, 2], text, sheet: { edition: 1, title: 'Heron H6' } });
});

test('When two leads add the next edition at the same moment, then one of them is told', async () => {
  await add(edition(1, 'race')).expect(201);
  const answers = await Promise.all([add(edition(2, 'race')), add(edition(2, 'race'))]);
  expect(answers.map(({ status }) => status).sort()).toEqual([201, 409]);
});

test('When a sheet is wrong, then the answer says in which line and why', async () => {
  const wrongs: [string, RegExp][] = [
    ['format: refettle.sheet\nversion: 1\n  edition: 1\n', /line \d/],
    [text.replace('selector: spin', 'selector: nobody'), /line \d+: .*nobody/],
    [text.replace('weights: {fill: 1, wash: 2', 'weights: {fill: 1, wash: 1'), /line \d+/],
    ['[]', /./],
    ['{"format":"refettle.sheet"}', /./],
    [text.replace('title: Heron H6', 'title: "a\\0b"'), /no text/],
    [text.replace('title: Heron H6', 'title: "\\uD800"'), /no text/],
  ];
  for (const [wrong, reason] of wrongs) {
    const problem = problemIn(await add(wrong));
    expect(problem).toMatchObject({ status: 422, errors: [{ pointer: '/text' }] });
    expect(problem.errors?.[0]?.reason).toMatch(reason);
  }
});

test('When the sheets are listed, then the newest edition of each family comes once, page by page', async () => {
  for (const family of ['wren-w3', 'alder-a1', 'plover-p4']) await add(edition(1, family)).expect(201);
  const families: string[] = [];
  let cursor: string | undefined;
  do {
    const page = await server.ok('listSheets', {
      as: server.people.sales,
      query: { limit: 2, ...(cursor === undefined ? {} : { cursor }) },
    });
    families.push(...page.items.map((row) => `${row.family} ${String(row.edition)}`));
    cursor = page.next;
  } while (cursor !== undefined);
  expect(families).toEqual(['alder-a1 1', 'heron-h6 2', 'plover-p4 1', 'race 2', 'wren-w3 1']);
});
