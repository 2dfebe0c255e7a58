// Whatever comes in: refused or stored, never a fault of ours, and never an answer that breaks its own schema.
import fc from 'fast-check';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import { ROLES_BY_ACTION } from '../../shared/api/roles.js';
import { routes, type Route, type RouteName } from '../../shared/api/routes.js';
import { addHeron, takeIn } from '../helpers/factories.js';
import { problemIn, startTestServer, type AtBench, type SignedInPerson, type TestServer } from '../helpers/test-server.js';
import { benchAlone, makeBench, type TestBench } from '../helpers/shared-bench.js';
import { validCalls } from '../helpers/valid-calls.js';

const SEED = 20_260_305;
const RUNS = 60;

let server: TestServer;
let number: number;
let bench: TestBench;
beforeAll(async () => {
  server = await startTestServer();
  await addHeron(server);
  ({ number } = await takeIn(server));
  bench = await makeBench(server);
});
afterAll(() => server.close());

/** What programs get wrong: empty, huge, negative, of another type, no text, names that mean something elsewhere. */
const nasty = fc.oneof(
  fc.constantFrom<unknown>(
    null,
    true,
    '',
    ' ',
    0,
    -1,
    1.5,
    1e308,
    -1e308,
    2 ** 53,
    2_147_483_648,
    [],
    {},
    '\u0000',
    '\ud800',
    '__proto__',
    "'; drop table units; --",
    '%',
    '\\',
  ),
  fc.constantFrom<unknown>(
    '0000-01-01T00:00:00Z',
    '9999-12-31T23:59:59Z',
    '2026-02-30T00:00:00Z',
    '017f22e2-79b0-7cc3-98c4-dc0c0c07398f',
    'x'.repeat(5000),
    // As long as a token, and as the hash of one.
    'x'.repeat(43),
    'f'.repeat(64),
    '$argon2',
    { constructor: 1 },
    [[[[]]]],
  ),
  fc.jsonValue({ maxDepth: 3 }),
  fc.string({ unit: 'binary' }),
);

type Path = (string | number)[];
function pathsOf(value: unknown, at: Path = []): Path[] {
  if (typeof value !== 'object' || value === null) return [at];
  return [at, ...Object.entries(value).flatMap(([key, inner]) => pathsOf(inner, [...at, Array.isArray(value) ? Number(key) : key]))];
}
function changed(value: unknown, path: Path, to: unknown): unknown {
  const [head, ...rest] = path;
  if (head === undefined) return to;
  if (Array.isArray(value)) return value.map((inner, index): unknown => (index === head ? changed(inner, rest, to) : inner));
  return { ...(value as object), [head]: changed((value as Record<string, unknown>)[String(head)], rest, to) };
}

/** An address can't hold half of a surrogate pair; ES2024's toWellFormed is not in our library types. */
const wellFormed = (text: string): string => text.replace(/\p{Surrogate}/gu, '\ufffd');

const posts = (Object.entries(routes) as [RouteName, Route][]).filter(([, route]) => route.body !== undefined).map(([name]) => name);
function asFor(name: RouteName): SignedInPerson | AtBench {
  const roles: readonly string[] = ROLES_BY_ACTION[routes[name].action];
  if (roles.length === 0) return benchAlone(bench);
  return roles.includes('lead') ? server.people.lead : server.people.admin;
}

async function refusedOrStored(name: RouteName, body: unknown): Promise<void> {
  const text = JSON.stringify(body);
  const response = await server
    .send(name, { params: { number, tag: '0001-1' }, as: asFor(name) })
    .type('json')
    .send(text);
  expect(response.status, `${response.text} for ${text.slice(0, 500)}`).toBeLessThan(500);
  if (response.status >= 400) problemIn(response);
}

describe.each(posts)('%s', (name) => {
  test('When the body is any JSON, then it is refused or stored', async () => {
    await fc.assert(
      fc.asyncProperty(nasty, (body) => refusedOrStored(name, body)),
      { seed: SEED, numRuns: RUNS },
    );
  });

  test('When one thing in a good body is anything else, then it is refused or stored', async () => {
    const { body } = await validCalls[name](server);
    // Files and scripts are long texts: their insides are other tests' work.
    const paths = pathsOf(body);
    await fc.assert(
      fc.asyncProperty(fc.constantFrom(...paths), nasty, (path, value) => refusedOrStored(name, changed(body, path, value))),
      { seed: SEED, numRuns: RUNS },
    );
  });
});

test('When a query is anything, then it is refused or answered', async () => {
  await fc.assert(
    fc.asyncProperty(fc.constantFrom('find', 'stage', 'limit', 'cursor', 'other'), fc.string({ unit: 'binary' }), async (key, value) => {
      const response = await server.send('listUnits', { as: server.people.sales, query: { [key]: wellFormed(value) } });
      expect(response.status, response.text).toBeLessThan(500);
    }),
    { seed: SEED, numRuns: 200 },
  );
});

test('When the address holds anything, then it is refused or answered', async () => {
  const names: RouteName[] = ['getUnit', 'getSheet', 'getRun', 'getCapture', 'getUnitTag', 'getPublicTag'];
  await fc.assert(
    fc.asyncProperty(fc.constantFrom(...names), fc.string({ minLength: 1, unit: 'binary' }), async (name, value) => {
      const part = wellFormed(value);
      const response = await server.send(name, { as: server.people.sales, params: { number: part, family: part, id: part, tag: part } });
      expect(response.status, response.text).toBeLessThan(500);
    }),
    { seed: SEED, numRuns: 200 },
  );
});
