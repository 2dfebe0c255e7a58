// A run at a bench, through the real program, heard by another person.
import { afterAll, beforeAll, expect, test } from 'vitest';
import { runProgram } from '../../../cli/program.js';
import { benchTerminal, signedIn, type BenchTerminal } from '../../helpers/bench-terminal.js';
import { addHeron, takeIn } from '../../helpers/factories.js';
import { liveClient, type LiveClient } from '../../helpers/live-client.js';
import { overHttp, type OverHttp } from '../../helpers/over-http.js';
import { startTestServer, type TestServer } from '../../helpers/test-server.js';

let server: TestServer;
let http: OverHttp;
let address: string;
beforeAll(async () => {
  server = await startTestServer({ shop: { demo: true } });
  server.deps.clock = () => new Date();
  await addHeron(server);
  http = await overHttp(server.app);
  address = http.address;
});
afterAll(async () => {
  await http.unplug();
  await server.close();
});

function benchOf(env: Record<string, string> = {}): BenchTerminal {
  const bench = benchTerminal({ env: { REFETTLE_SERVER: address, ...env } });
  signedIn(bench, server.people.technician);
  return bench;
}
const shop = (name: string): string => new URL(`../../../server/seed/shop/${name}.yaml`, import.meta.url).pathname;

/** A page that has heard everything up to now, and what it hears of the end from then on: the last word, and writing on the unit's books. */
async function lookingOn(number: number): Promise<{ client: LiveClient; end: () => Promise<string[]> }> {
  const [newest] = await server.deps.db('live_events').max<{ id: number }[]>('id as id');
  const client = liveClient(address, server.people.sales.token, `?unit=${number}`);
  await client.until(({ event }) => event.kind === 'now');
  const since = (): string[] =>
    client.heard
      .filter(({ id }) => Number(id ?? 0) > (newest?.id ?? 0))
      .flatMap(({ event }) => (event.kind === 'work' ? event.messages.map(({ kind }) => kind) : [event.kind]))
      .filter((kind) => kind === 'ended' || kind === 'unit changed');
  const end = async (): Promise<string[]> => {
    await client.until(() => since().includes('ended') && since().includes('unit changed'));
    client.cut();
    return since();
  };
  return { client, end };
}

test('When a script runs at a bench, then another person hears each step, the lamps, the code and the end, and the bench log goes its own way', async () => {
  const { number } = await takeIn(server);
  const { client, end } = await lookingOn(number);
  const bench = benchOf();
  await runProgram(['run', shop('h6-find'), String(number), '--rig', 'sim:heron-mend', '--json'], bench.context);
  expect(bench.stdout(), bench.stderr()).not.toBe('');
  const run = JSON.parse(bench.stdout()) as { run: string; verdict: string; steps: { id: string; verdict: string | null }[] };
  // What it recorded came by the bench log, and was announced by itself; for those who watch nothing had to wait.
  expect(await end()).toEqual(['unit changed', 'ended']);
  const messages = client.heard.flatMap(({ event }) => (event.kind === 'work' && event.work === run.run ? event.messages : []));
  const began = messages[0];
  expect(began).toMatchObject({ kind: 'began', what: 'run', rig: { simulated: true } });
  expect(began?.kind === 'began' && began.steps.map(({ id }) => id)).toEqual(run.steps.map(({ id }) => id));
  const results = messages.flatMap((message) => (message.kind === 'step ended' ? [[message.index, message.verdict ?? null]] : []));
  expect(results).toEqual(run.steps.map(({ verdict }, index) => [index, verdict]));
  expect(messages.some(({ kind }) => kind === 'lamps')).toBe(true);
  // The simulated panel shows G5K3 (the scenario's own plan).
  expect(messages.some((message) => message.kind === 'code so far' && message.code === 'G5K3')).toBe(true);
  expect(messages.at(-1)).toMatchObject({ kind: 'ended', how: 'ended', verdict: run.verdict });
  bench.remove();
});

test('When a single check is measured, then its reading is heard, and is on the books before the last word is told', async () => {
  const { number } = await takeIn(server);
  const { client, end } = await lookingOn(number);
  const bench = benchOf();
  expect(await runProgram(['measure', String(number), 'drain-pump-winding', '--rig', 'sim:heron-good'], bench.context)).toBe(0);
  expect(await end()).toEqual(['unit changed', 'ended']);
  const messages = client.heard.flatMap(({ event }) => (event.kind === 'work' ? event.messages : []));
  expect(messages.map(({ kind }) => kind)).toEqual(['began', 'step began', 'step ended', 'ended']);
  expect(messages[2]).toMatchObject({ verdict: 'pass', told: expect.stringMatching(/Ω/) as string });
  bench.remove();
});

test('When the lamps are captured, then the capture is on the books before the last word is told', async () => {
  const { number } = await takeIn(server);
  const bench = benchOf();
  const rig = ['--rig', 'sim:heron-good'];
  // Gate 4: nothing is energised before the dead tests.
  for (const check of ['visual', 'protective-conductor', 'insulation'])
    expect(await runProgram(['measure', String(number), check, ...rig], bench.context), bench.stderr()).toBe(0);
  const { end } = await lookingOn(number);
  await runProgram(['capture', String(number), '--seconds', '30', ...rig], bench.context);
  expect(bench.stdout(), bench.stderr()).toMatch(/Written down here, and sent/);
  expect(await end()).toEqual(['unit changed', 'ended']);
  bench.remove();
});
