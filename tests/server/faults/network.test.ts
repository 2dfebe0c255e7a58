// A bench that sends over bad cables, and many benches that send while the database is restarted: everything is stored, once.
import { chmodSync, mkdtempSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { setTimeout as pause } from 'node:timers/promises';
import { afterEach, expect, test } from 'vitest';
import { runSync } from '../../../cli/commands/sync.js';
import { waitingEntries, type OutboxEntry } from '../../../cli/journal/outbox.js';
import { migrate, openDb } from '../../../server/db.js';
import { startCluster, type Cluster } from '../../../server/postgres/cluster.js';
import { CABLE_FAULTS, startBadNetwork, type CableFault } from '../../helpers/bad-network.js';
import { benchTerminal, signedIn, type BenchTerminal } from '../../helpers/bench-terminal.js';
import { addHeron, pass } from '../../helpers/factories.js';
import { faults } from '../../helpers/faults.js';
import { overHttp, type OverHttp } from '../../helpers/over-http.js';
import { startProxy } from '../../helpers/proxy.js';
import { startTestServer, type SignedInPerson, type TestServer } from '../../helpers/test-server.js';
import { expectStoredOnce, workWithoutNetwork } from '../../helpers/waiting-work.js';

const LONGEST_MS = 1_800_000;

let undo: (() => unknown)[] = [];
afterEach(async () => {
  for (const step of undo.reverse()) await step();
  undo = [];
});

/** For as long as the test lasts. */
async function putOnline(server: TestServer): Promise<OverHttp> {
  const http = await overHttp(server.app);
  undo.push(() => http.unplug());
  return http;
}

function benchAt(address: string, person: SignedInPerson): BenchTerminal {
  const bench = benchTerminal({ env: { REFETTLE_SERVER: address } });
  undo.push(() => bench.remove());
  signedIn(bench, person);
  return bench;
}

const waitsOn = (bench: BenchTerminal): number => waitingEntries(bench.context.home).entries.length;

test(
  'When cables cut, slow down and half-close at each request of a sync, then everything is stored once and nothing is lost',
  { timeout: LONGEST_MS },
  async () => {
    const { count, random, below } = faults('cable faults under a sync', 8);
    const server = await startTestServer();
    undo.push(() => server.close());
    await addHeron(server);
    const seen: Partial<Record<CableFault, number>> = {};
    let made = 0;
    const network = await startBadNetwork((await putOnline(server)).port, () => {
      if (made >= count || random() < 0.3) return undefined;
      // Each kind in turn, then by chance.
      const fault = CABLE_FAULTS[made < CABLE_FAULTS.length ? made : below(CABLE_FAULTS.length)];
      made += 1;
      if (fault) seen[fault] = (seen[fault] ?? 0) + 1;
      return fault;
    });
    undo.push(() => network.close());
    const person = server.people.technician;
    const bench = benchAt(network.address, person);
    const entries: OutboxEntry[] = [];
    let syncs = 0;
    while (made < count || waitsOn(bench) > 0) {
      if (waitsOn(bench) === 0) entries.push(...(await workWithoutNetwork(server, bench, person)));
      syncs += 1;
      expect([0, 5], bench.stderr()).toContain(await runSync({}, bench.context));
      expect(waitingEntries(bench.context.home).entries.filter(({ refused }) => refused)).toEqual([]);
    }
    await expectStoredOnce(server, entries);
    const kinds = Object.entries(seen).map(([kind, times]) => `${kind} ${String(times)}`);
    process.stdout.write(
      `${String(made)} cable faults (${kinds.join(', ')}) in ${String(syncs)} syncs of ${String(entries.length)} things; all stored once\n`,
    );
  },
);

test(
  'When the database is restarted while many benches send at once, then everything is stored once and nothing is lost',
  { timeout: LONGEST_MS },
  async () => {
    const { count, random, below } = faults('benches that send while the database is restarted', 4);
    const folder = mkdtempSync(join(tmpdir(), 'refettle-restarted-'));
    chmodSync(folder, 0o711); // as root, PostgreSQL's user must pass through
    undo.push(() => rmSync(folder, { recursive: true, force: true }));
    const place = { folder: join(folder, 'postgres'), passwordFile: join(folder, 'password'), logFile: join(folder, 'postgres.log') };
    // Durable: some of the restarts are kills.
    const start = (): Promise<Cluster> => startCluster(place, { durable: true });
    let cluster = await start();
    undo.push(() => cluster.stop());
    const portOf = ({ url }: Cluster): number => Number(new URL(url).port);
    // Each start has a port of its own; the server knows one address.
    const front = await startProxy([portOf(cluster)]);
    undo.push(() => front.close());
    const address = new URL(cluster.url);
    address.port = new URL(front.address).port;
    const db = openDb(address.href);
    undo.push(() => db.destroy());
    await migrate(db);
    const people = {} as TestServer['people'];
    const server = await startTestServer({ existing: { database: { db, url: address.href, drop: () => Promise.resolve() }, people } });
    undo.push(() => server.close());
    await addHeron(server);
    const { address: url } = await putOnline(server);

    const benches: BenchTerminal[] = [];
    const entries: OutboxEntry[] = [];
    for (let at = 1; at <= count; at += 1) {
      const person = await server.addPerson('technician', `Technician ${String(at)}`);
      const bench = benchAt(url, person);
      benches.push(bench);
      entries.push(...(await workWithoutNetwork(server, bench, person)));
    }
    pass(server, 60);

    let syncs = 0;
    const sendAll = async (bench: BenchTerminal): Promise<void> => {
      while (waitsOn(bench) > 0) {
        syncs += 1;
        expect([0, 5], bench.stderr()).toContain(await runSync({}, bench.context));
        expect(waitingEntries(bench.context.home).entries.filter(({ refused }) => refused)).toEqual([]);
        await pause(50 + below(100));
      }
    };
    const waiting = (): number => benches.reduce((sum, bench) => sum + waitsOn(bench), 0);
    const sending = Promise.all(benches.map(sendAll));
    const restarts = { stopped: 0, killed: 0 };
    while (waiting() > 0 && restarts.stopped + restarts.killed < count) {
      await pause(50 + below(150));
      if (random() < 0.5) {
        restarts.killed += 1;
        process.kill(cluster.processId, 'SIGKILL');
        await cluster.ended;
      } else {
        restarts.stopped += 1;
        await cluster.stop();
      }
      cluster = await start();
      front.targets = [portOf(cluster)];
      await pause(200 + below(500));
    }
    await sending;
    expect(restarts.stopped + restarts.killed).toBeGreaterThan(0);
    await expectStoredOnce(server, entries);
    process.stdout.write(
      `${String(count)} benches, ${String(entries.length)} things in ${String(syncs)} syncs, PostgreSQL stopped ${String(restarts.stopped)} and killed ${String(restarts.killed)} times under them; all stored once\n`,
    );
  },
);
