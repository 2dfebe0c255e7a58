// Starts everything in order, says where it is, and stops in the other order.
import { existsSync } from 'node:fs';
import { join } from 'node:path';
import { pino } from 'pino';
import { announcement } from './announce.js';
import { createApp, type AppDependencies } from './app.js';
import { createFirstAdminLink } from './auth/first-admin.js';
import { readConfig, type Config } from './config.js';
import { holdDataFolder, makeDataFolder } from './data-folder.js';
import { migrate, openDb, type Db } from './db.js';
import { LiveHub } from './features/live/live-hub.js';
import { registerSigningKey } from './features/tags/signing-key-store.js';
import { loadSigningKey, readSigningKey } from './features/tags/signing-key.js';
import { keepTidy } from './housekeeping.js';
import { addressOf, closeServer, listen, makeSureThatPortIsFree } from './listen.js';
import { loggedError } from './logged-error.js';
import { packageRoot } from './package-root.js';
import { startOwnCluster } from './postgres/own-cluster.js';
import { runDemoBench } from './seed/run-demo-bench.js';
import { seedDemoShop } from './seed/seed-demo-shop.js';
import { SetUpError } from './set-up-error.js';
import { Shutdown } from './shutdown.js';

const write = (text: string): void => void process.stdout.write(text);
const writeError = (text: string): void => void process.stderr.write(text);
const shutdown = new Shutdown(write);

async function main(): Promise<void> {
  shutdown.listenToSignals();
  const config = readConfig(process.env);
  makeDataFolder(config.dataDir);
  const hold = await holdDataFolder(config.dataDir);
  shutdown.add(() => {
    hold.release();
  });
  await makeSureThatPortIsFree(config.host, config.port);

  const databaseUrl = config.databaseUrl ?? (await startDatabase(config));
  const db = openDb(databaseUrl);
  shutdown.add(() => db.destroy());
  await migrateOrSayWhy(db, config);
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
  const server = await listen(createApp(deps), config.host, config.port);
  shutdown.add(() => closeServer(server));
  // Before the server: an open page must not hold it up.
  shutdown.add(() => live.close());
  const address = addressOf(server);
  shutdown.add(keepTidy(deps));

  if (config.demo) await showDemoBench(config, address, accounts);
  const firstAdminLink = config.demo ? undefined : await createFirstAdminLink(deps);
  if (!shutdown.isUnderWay) write(announcement(config, address, accounts, firstAdminLink));
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

async function migrateOrSayWhy(db: Db, config: Config): Promise<void> {
  try {
    await migrate(db);
  } catch (cause) {
    if (config.databaseUrl === undefined) throw cause;
    throw new SetUpError(
      `The database that DATABASE_URL names can't be used: ${cause instanceof AggregateError ? String(cause.errors[0]) : String(cause)}`,
      'Is it running, is the password right, and may this role make tables there? Unset DATABASE_URL to use a database in the data folder.',
      { cause },
    );
  }
}

/** The shop serves also where its demonstration went wrong. */
async function showDemoBench(config: Config, address: string, accounts: Awaited<ReturnType<typeof seedDemoShop>>): Promise<void> {
  const stop = new AbortController();
  shutdown.add(() => {
    stop.abort();
  });
  try {
    await runDemoBench({ address, dataDir: config.dataDir, accounts, write, signal: stop.signal });
  } catch (error) {
    if (!shutdown.isUnderWay) writeError(`The first bench run went wrong: ${String(error)} It is tried again at the next start.\n`);
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
