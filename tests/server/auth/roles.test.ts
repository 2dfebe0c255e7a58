import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import { ACTIONS_OF_A_BENCH, benchMay, ROLES, ROLES_BY_ACTION, type Role } from '../../../shared/api/roles.js';
import { routes, type RouteName } from '../../../shared/api/routes.js';
import { addHeron } from '../../helpers/factories.js';
import { benchAlone, makeBench, standsAt, type TestBench } from '../../helpers/shared-bench.js';
import { problemIn, startTestServer, type TestServer } from '../../helpers/test-server.js';
import { validCalls } from '../../helpers/valid-calls.js';

/** Those whose people may sign on at a bench. */
const AT_THE_BENCH = ['technician', 'lead'] as const;

let server: TestServer;
let bench: TestBench;
beforeAll(async () => {
  server = await startTestServer();
  await addHeron(server);
  bench = await makeBench(server);
  for (const role of AT_THE_BENCH) await standsAt(server, bench, server.people[role]);
});
afterAll(() => server.close());

const names = Object.keys(routes) as RouteName[];
const rolesOf = (name: RouteName): readonly (Role | 'public')[] => ROLES_BY_ACTION[routes[name].action];
const guarded = names.filter((name) => !rolesOf(name).includes('public'));
/** Public, and refused here for another reason than who asks: no such password, no such link. */
const refusedAllTheSame: Partial<Record<RouteName, number>> = { signIn: 401, createFirstAdmin: 401, lookAtLink: 401, useLink: 401 };

describe.each(guarded)('%s', (name) => {
  test('When nobody is signed in, then it is 401 and says how', async () => {
    const response = await server.send(name, {
      params: { number: 1, id: '017f22e2-79b0-7cc3-98c4-dc0c0c07398f', tag: '0001-1', family: 'heron-h6' },
    });
    expect(problemIn(response)).toMatchObject({ status: 401, kind: 'not-signed-in' });
    expect(response.headers['www-authenticate']).toMatch(/^Bearer/); // RFC 6750, section 3
  });

  test.each(ROLES.filter((role) => !rolesOf(name).includes(role)))(
    'When %s asks, then it is 403, whatever the request holds',
    async (role) => {
      const response = await server.send(name, { params: { number: 1, id: 'x', tag: 'x', family: 'x' }, as: server.people[role] });
      expect(problemIn(response)).toMatchObject({ status: 403, kind: 'role' });
    },
  );

  test.each(ROLES.filter((role) => rolesOf(name).includes(role)))('When %s asks, then it is done', async (role) => {
    const call = await validCalls[name](server, server.people[role]);
    const as = name === 'signOut' ? await server.addPerson(role, `Leaver ${role}`) : server.people[role];
    await server.ok(name, { ...call, as });
  });
});

const anything = { params: { number: 1, id: 'x', tag: 'x', family: 'x' } };

describe.each(guarded)('%s, by the token of a shared bench', (name) => {
  const may = benchMay(routes[name].action);

  test('When nobody has signed on there, then only what a bench does alone is done', async () => {
    if (may === 'alone') {
      await server.ok(name, { ...(await validCalls[name](server)), as: benchAlone(bench) });
      return;
    }
    const problem = problemIn(await server.send(name, { ...anything, as: benchAlone(bench) }));
    expect(problem).toMatchObject(may === 'person' ? { status: 401, kind: 'not-signed-in' } : { status: 403, kind: 'role' });
  });

  test.each(AT_THE_BENCH)('When a %s has signed on there, then it is what both tables allow, and no more', async (role) => {
    const as = { token: bench.token, person: server.people[role].id };
    const allowed = may === 'alone' || (may === 'person' && rolesOf(name).includes(role));
    if (allowed) await server.ok(name, { ...(await validCalls[name](server)), as });
    else expect(problemIn(await server.send(name, { ...anything, as }))).toMatchObject({ status: 403, kind: 'role' });
  });

  test('When the bench names somebody who never signed on there, then it is 403, whatever it may do', async () => {
    const as = { token: bench.token, person: server.people.admin.id };
    expect(problemIn(await server.send(name, { ...anything, as }))).toMatchObject({ status: 403, kind: 'sign-on' });
  });
});

test('When the table of a bench is read, then nothing of it signs off, withdraws, or touches people, sheets and benches', () => {
  // Design: a bench does what is done at a bench.
  expect(Object.keys(ACTIONS_OF_A_BENCH).filter((action) => /sign-off|withdraw|person|pin|write|session|audit|key/.test(action))).toEqual(
    [],
  );
});

test.each(names.filter((name) => rolesOf(name).includes('public')))(
  'When nobody is signed in and asks for %s, then who asks does not matter',
  async (name) => {
    const call = await validCalls[name](server);
    for (const as of [undefined, server.people.technician]) {
      expect((await server.send(name, { ...call, as })).status).toBe(refusedAllTheSame[name] ?? routes[name].status);
    }
  },
);

test('When an admin would sign off, then no rule of the shop lets that happen', () => {
  // Contract, section 7: admin never signs off.
  expect(rolesOf('signOff')).toEqual(['lead']);
});
