// Starts everything in order, says where it is, and stops in the other order.
import { existsSync } from 'node:fs';
import type { RequestListener, Server } from 'node:http';
import { Server as TlsServer } from 'node:https';
import { join } from 'node:path';
import { pino } from 'pino';
import { announcement } from './announce.js';
import { createApp, type AppDependencies } from './app.js';
import { createFirstAdminLink } from './auth/first-admin.js';
import { readConfig, type Config } from './config.js';
import { holdDataFolder, makeDataFolder } from './data-folder.js';
import { keepHolding } from './database-hold.js';
import { migrate, openDb, type Db } from './db.js';
import { LiveHub } from './features/live/live-hub.js';
import { registerSigningKey } from './features/tags/signing-key-store.js';
import { loadSigningKey, readSigningKey } from './features/tags/signing-key.js';
import { keepTidy } from './housekeeping.js';
import { addressOf, closeServer, listen, makeSureThatPortIsFree, networkAddressesOf } from './listen.js';
import { loggedError } from './logged-error.js';
import { packageRoot } from './package-root.js';
import { publicOnly } from './public-listener.js';
import { startOwnCluster } from './postgres/own-cluster.js';
import { runDemoBench } from './seed/run-demo-bench.js';
import { seedDemoBench } from './seed/seed-demo-bench.js';
import { seedDemoShop } from './seed/seed-demo-shop.js';
import { SetUpError } from './set-up-error.js';
import { Shutdown } from './shutdown.js';
import { daysLeft, readTlsPair, type Tls } from './tls.js';

const write = (text: string): void => void process.stdout.write(text);
const writeError = (text: string): void => void process.stderr.write(text);
const shutdown = new Shutdown(write);
const PUBLIC_SETTINGS = { host: 'PUBLIC_HOST', port: 'PUBLIC_PORT' };
/** Time enough to renew it. */
const WARNED_BEFORE_DAYS = 14;

async function main(): Promise<void> {
  shutdown.listenToSignals();
  const config = readConfig(process.env);
  makeDataFolder(config.dataDir);
  const hold = await holdDataFolder(config.dataDir);
  shutdown.add(() => {
    hold.release();
  });
  const pair = config.tls && readTlsPair(config.tls);
  await makeSureThatPortIsFree(config.host, config.port);
  if (config.publicListener) await makeSureThatPortIsFree(config.publicListener.host, config.publicListener.port, PUBLIC_SETTINGS);

  const databaseUrl = config.databaseUrl ?? (await startDatabase(config));
  const db = openDb(databaseUrl);
  shutdown.add(() => db.destroy());
  await takeDatabase(db, databaseUrl, config);
  await registerSigningKey(db, await loadSigningKey(config.dataDir), new Date());

  const builtWeb = join(packageRoot, 'dist/web');
  const log = pino(
    { level: 'warn', serializers: { err: pino.stdSerializers.wrapErrorSerializer(loggedError) } },
    pino.destination({ dest: 2, sync: true }),
  );
  const live = new LiveHub({ db, databaseUrl, log });
  const deps: AppDependencies = {
    db,
    config,
    signingKey: () => readSigningKey(config.dataDir),
    clock: () => new Date(),
    live,
    webDir: existsSync(builtWeb) ? builtWeb : undefined,
    log,
  };
  const accounts = config.demo ? await seedDemoShop(deps) : [];
  const demoBench = config.demo ? await seedDemoBench(deps) : undefined;
  const app = createApp(deps);
  const tls = config.tls && { files: config.tls, log };
  const server = await listen(app, config.host, config.port, { tls });
  shutdown.add(() => closeServer(server));
  if (pair) warnOfEnd(daysLeft(pair, new Date()));
  const publicServer = config.publicListener && (await listenToBuyers(app, config.publicListener, tls));
  // Before the server: an open page must not hold it up.
  shutdown.add(() => live.close());
  shutdown.add(keepTidy(deps));

  const address = addressOf(server);
  if (config.demo) await showDemoBench(app, config, server, accounts);
  const firstAdminLink = config.demo ? undefined : await createFirstAdminLink(deps, address);
  const places = { address, network: networkAddressesOf(server), publicAddress: publicServer && addressOf(publicServer) };
  if (!shutdown.isUnderWay) write(announcement(config, places, accounts, firstAdminLink, demoBench));
}

async function listenToBuyers(app: RequestListener, { host, port }: { host: string; port: number }, tls: Tls | undefined) {
  const server = await listen(publicOnly(app), host, port, { tls, settings: PUBLIC_SETTINGS });
  shutdown.add(() => closeServer(server));
  return server;
}

function warnOfEnd(days: number): void {
  if (days < 0) writeError('The certificate of TLS_CERT has ended: browsers refuse it. Renew it; it is taken without a restart.\n');
  else if (days < WARNED_BEFORE_DAYS) writeError(`The certificate of TLS_CERT ends in ${days.toString()} days.\n`);
}

async function startDatabase(config: Config): Promise<string> {
  const cluster = await startOwnCluster(config.dataDir);
  shutdown.add(() => cluster.stop());
  void cluster.ended.then(() => {
    if (shutdown.isUnderWay) return;
    writeError(`PostgreSQL has ended by itself. Its log: ${join(config.dataDir, 'postgres.log')}. What to do: npm start.\n`);
    void shutdown.stop(1);
  });
  return cluster.url;
}

/** Held against a restore for as long as the server works, and brought to the newest shape. */
async function takeDatabase(db: Db, databaseUrl: string, config: Config): Promise<void> {
  try {
    shutdown.add(
      await keepHolding(databaseUrl, (why) => {
        writeError(`${why.message} This server ends.\nWhat to do: ${why.remedy}\n`);
        void shutdown.stop(1);
      }),
    );
    await migrate(db);
  } catch (cause) {
    if (config.databaseUrl === undefined || cause instanceof SetUpError) throw cause;
    throw new SetUpError(
      `The database that DATABASE_URL names can't be used: ${cause instanceof AggregateError ? String(cause.errors[0]) : String(cause)}`,
      'Is it running, is the password right, and may this role make tables there? Unset DATABASE_URL to use a database in the data folder.',
      { cause },
    );
  }
}

/** The shop serves also where its demonstration went wrong. */
async function showDemoBench(
  app: RequestListener,
  config: Config,
  server: Server,
  accounts: Awaited<ReturnType<typeof seedDemoShop>>,
): Promise<void> {
  const stop = new AbortController();
  // The certificate need not be one for 127.0.0.1: then for this run alone there is a door that needs none.
  const plain = server instanceof TlsServer ? await listen(app, '127.0.0.1', 0) : undefined;
  const address = addressOf(plain ?? server);
  shutdown.add(() => {
    stop.abort();
  });
  try {
    await runDemoBench({ address, dataDir: config.dataDir, accounts, write, signal: stop.signal });
  } catch (error) {
    if (!shutdown.isUnderWay) writeError(`The first bench run went wrong: ${String(error)} It is tried again at the next start.\n`);
  } finally {
    if (plain) await closeServer(plain);
  }
}

main().catch(async (error: unknown) => {
  if (shutdown.isUnderWay) return;
  writeError(
    error instanceof SetUpError
      ? `${error.message}\nWhat to do: ${error.remedy}\n`
      : `${error instanceof Error ? String(error.stack) : String(error)}\n`,
  );
  await shutdown.stop(1);
});
