// For each route of the table, a call that the server takes: tests walk the table with it.
import type { RouteName } from '../../shared/api/routes.js';
import {
  mendAndProve,
  newCapture,
  newInspection,
  newReading,
  newRepair,
  newRun,
  newUnit,
  rulesSeen,
  shopFileText,
  signedOffUnit,
  takeIn,
  passDeadTests,
} from './factories.js';
import type { Call, TestServer } from './test-server.js';

type MakeCall = (server: TestServer) => Promise<Omit<Call, 'as'>>;

let count = 0;
const fresh = (word: string): string => `${word}-${String((count += 1))}`;

const onNewUnit =
  (body: (server: TestServer) => unknown, { ready = false } = {}): MakeCall =>
  async (server) => {
    const { number } = await takeIn(server);
    if (ready) await passDeadTests(server, number);
    return { params: { number }, body: body(server) };
  };

/** Reading a tag changes nothing: one unit a server does for all who look. */
const taggedUnits = new WeakMap<TestServer, Promise<number>>();
function taggedUnit(server: TestServer): Promise<number> {
  const known = taggedUnits.get(server) ?? signedOffUnit(server).then(({ unit }) => unit.number);
  taggedUnits.set(server, known);
  return known;
}

/** The Heron H6 sheet must be there. */
export const validCalls: Record<RouteName, MakeCall> = {
  health: () => Promise.resolve({}),
  signIn: (server) => Promise.resolve({ body: { email: server.people.sales.email, password: 'wrong all the same' } }),
  signOut: () => Promise.resolve({}),
  createFirstAdmin: () =>
    Promise.resolve({ body: { token: 'none', email: 'a@millrace.example', name: 'A', password: 'long enough to be one' } }),
  me: () => Promise.resolve({}),
  listPeople: () => Promise.resolve({}),
  createPerson: () =>
    Promise.resolve({
      body: { email: `${fresh('person')}@millrace.example`, name: 'Tamsin Oake', role: 'technician', password: 'long enough to be one' },
    }),
  listSheets: () => Promise.resolve({}),
  getSheet: () => Promise.resolve({ params: { family: 'heron-h6' } }),
  addSheet: () =>
    Promise.resolve({ body: { text: shopFileText('heron-h6.yaml').replace('family: heron-h6', `family: ${fresh('heron')}`) } }),
  listUnits: () => Promise.resolve({}),
  takeInUnit: () => Promise.resolve({ body: newUnit() }),
  getUnit: async (server) => ({ params: { number: (await takeIn(server)).number } }),
  giveFamily: async (server) => {
    const { number } = await takeIn(server, { family: undefined });
    return { params: { number }, body: { family: 'heron-h6' } };
  },
  recordOverride: onNewUnit(() => ({ gate: 'dead tests', reason: 'the insulation tester is away' })),
  recordCapture: onNewUnit((server) => newCapture(server), { ready: true }),
  getCapture: async (server) => {
    const { number } = await takeIn(server);
    const body = newCapture(server, 'ready blink', { fromFile: true });
    return { params: { id: (await server.ok('recordCapture', { params: { number }, as: server.people.technician, body })).id } };
  },
  recordReading: onNewUnit((server) => newReading(server, 'heater')),
  recordInspection: onNewUnit((server) => newInspection(server)),
  recordRepair: onNewUnit((server) => newRepair(server)),
  recordRun: onNewUnit((server) => newRun(server, 'h6-mend')),
  getRun: async (server) => {
    const { number } = await takeIn(server);
    return {
      params: {
        id: (await server.ok('recordRun', { params: { number }, as: server.people.technician, body: newRun(server, 'h6-mend') })).id,
      },
    };
  },
  signOff: async (server) => {
    const { number } = await takeIn(server);
    await mendAndProve(server, number);
    return { params: { number }, body: await rulesSeen(server, number) };
  },
  getUnitTag: async (server) => ({ params: { number: await taggedUnit(server) } }),
  withdrawTag: async (server) => ({
    params: { tag: (await signedOffUnit(server)).tag.state.number },
    body: { reason: 'the wrong machine was signed' },
  }),
  getPublicTag: () => Promise.resolve({ params: { tag: '0001-1' }, query: { word: '7QKF' } }),
};
