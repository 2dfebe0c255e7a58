// What a shop sends, made up: each factory gives something that the server takes, and tests change one thing of it.
import { readFileSync } from 'node:fs';
import { v4 as anyId } from 'uuid';
import type { RequestBody } from '../../shared/api/routes.js';
import type { RunLog } from '../../shared/script/run-log.js';
import type { Unit } from '../../shared/api/units.js';
import { benchLog, captureFile, readingBody, type BenchLogOptions } from './bench-log.js';
import type { SignedInPerson, TestServer } from './test-server.js';
import { shopScript } from './unit-facts.js';

export const shopFileText = (name: string): string => readFileSync(new URL(`../../server/seed/shop/${name}`, import.meta.url), 'utf8');

let serial = 0;
export function newUnit(change: Partial<RequestBody<'takeInUnit'>> = {}): RequestBody<'takeInUnit'> {
  serial += 1;
  return {
    appliance: 'washing machine',
    plate: {
      maker: 'Brindle',
      model: 'BW 714',
      serial: `7143 ${String(serial).padStart(4, '0')}`,
      protectionClass: 'I',
      volts: 230,
      massKg: 68,
    },
    family: 'heron-h6',
    complaint: 'Stands full of water, lamps blink',
    ...change,
  };
}

/** Adds the Heron H6 sheet, whose text may be changed first. */
export async function addHeron(server: TestServer, change: (text: string) => string = (text) => text): Promise<void> {
  await server.ok('addSheet', { as: server.people.lead, body: { text: change(shopFileText('heron-h6.yaml')) } });
}

export const takeIn = (server: TestServer, change: Partial<RequestBody<'takeInUnit'>> = {}): Promise<Unit> =>
  server.ok('takeInUnit', { as: server.people.technician, body: newUnit(change) });

const recorded = (server: TestServer) => ({ id: anyId(), at: server.time.now.toISOString() });

export const newReading = (server: TestServer, checkId: string, value?: number, simulated = false): RequestBody<'recordReading'> => ({
  ...recorded(server),
  simulated,
  reading: readingBody(checkId, value),
});
export const newInspection = (
  server: TestServer,
  verdict: 'pass' | 'fail' = 'pass',
  simulated = false,
): RequestBody<'recordInspection'> => ({
  ...recorded(server),
  simulated,
  inspection: { checkId: 'visual', title: 'Visual check', verdict },
});
export const newRepair = (
  server: TestServer,
  change: Partial<RequestBody<'recordRepair'>['repair']> = {},
): RequestBody<'recordRepair'> => ({
  ...recorded(server),
  repair: { part: 'Drain pump', partSource: { kind: 'new' }, minutes: 36, costMinor: 2450, ...change },
});
/** The first part of a sitting: a run began on this unit. */
export const newLive = (unit: number, change: Partial<RequestBody<'tellLive'>> = {}): RequestBody<'tellLive'> => ({
  sitting: anyId(),
  part: 0,
  work: anyId(),
  unit,
  messages: [
    {
      kind: 'began',
      at: '2026-03-05T09:00:00.000Z',
      what: 'run',
      title: 'h6-find',
      machine: 'Brindle BW 714',
      steps: [
        { id: 'winding', kind: 'measure', title: 'Drain pump winding' },
        { id: 'see', kind: 'capture', title: 'Read the codes' },
      ],
      rig: { name: 'bench 1', simulated: false },
    },
  ],
  ...change,
});
export const newCapture = (
  server: TestServer,
  panel: Parameters<typeof captureFile>[0] = 'ready blink',
  { fromFile = false, ...header }: { fromFile?: boolean } & Parameters<typeof captureFile>[1] = {},
): RequestBody<'recordCapture'> => ({
  ...recorded(server),
  fromFile,
  file: captureFile(panel, { capturedAt: server.time.now.toISOString(), ...header }),
});

export function newRun(server: TestServer, name: 'h6-find' | 'h6-mend' | 'h6-prove', change: Partial<BenchLogOptions> = {}): RunLog {
  return benchLog({
    id: anyId(),
    script: shopScript(name),
    scriptText: shopFileText(`${name}.yaml`),
    startedAt: server.time.now.toISOString(),
    ...change,
  });
}

/** Lets time pass, so that what comes next has a moment of its own. */
export function pass(server: TestServer, minutes: number): void {
  server.time.now = new Date(server.time.now.getTime() + minutes * 60_000);
}

/** Every dead test, passed, in its order. */
export async function passDeadTests(server: TestServer, number: number, simulated = false): Promise<void> {
  const call = { params: { number }, as: server.people.technician };
  await server.ok('recordInspection', { ...call, body: newInspection(server, 'pass', simulated) });
  await server.ok('recordReading', { ...call, body: newReading(server, 'protective-conductor', undefined, simulated) });
  await server.ok('recordReading', { ...call, body: newReading(server, 'insulation', undefined, simulated) });
}

/** The whole way through the bench: found, mended, proved. Only the sign-off is missing. */
export async function mendAndProve(
  server: TestServer,
  number: number,
  { as = server.people.technician, simulated = false }: { as?: SignedInPerson; simulated?: boolean } = {},
): Promise<void> {
  for (const name of ['h6-find', 'h6-mend', 'h6-prove'] as const) {
    const run = newRun(server, name, { simulated });
    pass(server, run.steps.length + 1);
    await server.ok('recordRun', { params: { number }, as, body: run });
    pass(server, 1);
  }
}

export async function rulesSeen(server: TestServer, number: number): Promise<RequestBody<'signOff'>> {
  const page = await server.ok('getUnit', { params: { number }, as: server.people.lead });
  return { seen: page.readiness.rules.map(({ id, state }) => ({ id, state })) };
}

/** A unit with a standing tag. */
export async function signedOffUnit(server: TestServer, { simulated = false }: { simulated?: boolean } = {}) {
  const unit = await takeIn(server);
  await mendAndProve(server, unit.number, { simulated });
  const tag = await server.ok('signOff', {
    params: { number: unit.number },
    as: server.people.lead,
    body: await rulesSeen(server, unit.number),
  });
  return { unit, tag };
}
