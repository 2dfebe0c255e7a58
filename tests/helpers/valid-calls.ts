// For each route of the table, a call that the server takes: tests walk the table with it.
import { v7 as newId } from 'uuid';
import { insertSession } from '../../server/auth/session-store.js';
import { newToken } from '../../server/auth/token.js';
import type { RouteName } from '../../shared/api/routes.js';
import {
  mendAndProve,
  newCapture,
  newInspection,
  newLive,
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
import { cheapHash, givePin, makeBench, PIN } from './shared-bench.js';
import type { Call, SignedInPerson, TestServer } from './test-server.js';

/** `as`: who will call, where that matters. */
type MakeCall = (server: TestServer, as?: SignedInPerson) => Promise<Omit<Call, 'as'>>;

const OWN_PASSWORD = 'long enough to be one';
let count = 0;
const fresh = (word: string): string => `${word}-${String((count += 1))}`;

const onNewUnit =
  (body: (server: TestServer) => unknown, { ready = false } = {}): MakeCall =>
  async (server) => {
    const { number } = await takeIn(server);
    if (ready) await passDeadTests(server, number);
    return { params: { number }, body: body(server) };
  };

const somebodyNew = async (server: TestServer): Promise<string> => (await server.addPerson('technician', fresh('Somebody'))).id;

/** The id of one more session of somebody's. */
const anotherSession = (server: TestServer, personId: string): Promise<string> =>
  insertSession(server.deps.db, { token: newToken(), personId, createdAt: server.time.now, expiresAt: new Date('2100-01-01T00:00:00Z') });

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
  getPerson: (server) => Promise.resolve({ params: { id: server.people.sales.id } }),
  invitePerson: () => Promise.resolve({ body: { email: `${fresh('invited')}@millrace.example`, name: 'Tamsin Oake', role: 'sales' } }),
  makeLink: (server) => Promise.resolve({ params: { id: server.people.sales.id } }),
  changeRole: async (server) => ({ params: { id: await somebodyNew(server) }, body: { role: 'lead' } }),
  deactivatePerson: async (server) => ({ params: { id: await somebodyNew(server) }, body: { reason: 'works elsewhere now' } }),
  activatePerson: async (server) => {
    const id = await somebodyNew(server);
    await server.deps.db('people').where({ id }).update({ active: false });
    return { params: { id } };
  },
  listSessions: (server) => Promise.resolve({ params: { id: server.people.sales.id } }),
  revokeSession: async (server) => {
    const id = await somebodyNew(server);
    return { params: { id, session: await anotherSession(server, id) } };
  },
  revokeSessions: async (server) => ({ params: { id: await somebodyNew(server) } }),
  listOwnSessions: () => Promise.resolve({}),
  revokeOwnSession: async (server, as) => ({ params: { session: as ? await anotherSession(server, as.id) : newId() } }),
  revokeOtherSessions: () => Promise.resolve({}),
  changePassword: async (server) => {
    await server.deps.db('people').update({ password_hash: await cheapHash(OWN_PASSWORD) });
    return { body: { oldPassword: OWN_PASSWORD, newPassword: 'another long enough one' } };
  },
  lookAtLink: () => Promise.resolve({ body: { token: 'none' } }),
  useLink: () => Promise.resolve({ body: { token: 'none', password: 'long enough to be one' } }),
  listAudit: () => Promise.resolve({}),
  exportAudit: () => Promise.resolve({}),
  getOwnPin: () => Promise.resolve({}),
  setOwnPin: async (server) => {
    await server.deps.db('people').update({ password_hash: await cheapHash(OWN_PASSWORD) });
    return { body: { password: OWN_PASSWORD, pin: '2580' } };
  },
  listPins: () => Promise.resolve({}),
  setPin: (server) => Promise.resolve({ params: { id: server.people.technician.id }, body: { pin: '4071' } }),
  clearPin: (server) => Promise.resolve({ params: { id: server.people.sales.id } }),
  listBenches: () => Promise.resolve({}),
  createBench: () => Promise.resolve({ body: { name: fresh('bench') } }),
  renewBenchToken: async (server) => ({ params: { id: (await makeBench(server)).id } }),
  revokeBench: async (server) => ({ params: { id: (await makeBench(server)).id } }),
  ownBench: () => Promise.resolve({}),
  reportRig: () => Promise.resolve({ body: { name: 'bench 1', instruments: [{ id: 'M-03', kind: 'meter', port: '/dev/ttyUSB1' }] } }),
  signOnAtBench: async (server) => {
    await givePin(server, server.people.technician);
    return { body: { person: server.people.technician.id, pin: PIN } };
  },
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
  recordRun: onNewUnit((server) => ({ ...newRun(server, 'h6-mend'), sheetEdition: 1 })),
  getRun: async (server) => {
    const { number } = await takeIn(server);
    return {
      params: {
        id: (await server.ok('recordRun', { params: { number }, as: server.people.technician, body: newRun(server, 'h6-mend') })).id,
      },
    };
  },
  tellLive: async (server) => {
    const { number } = await takeIn(server);
    return { body: newLive(number) };
  },
  hearLive: () => Promise.resolve({}),
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
  getPublicKeys: () => Promise.resolve({}),
};
