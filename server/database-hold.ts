import pg from 'pg';
import { LOCK } from './advisory-locks.js';
import { SetUpError } from './set-up-error.js';

const RECONNECT = { firstMs: 100, mostMs: 5_000 };
const ANSWERS_WITHIN_MS = 10_000;

/** Whoever works with the shop's database holds it with the others; a restore, which puts another in its place, holds it alone. */
type How = 'with others' | 'alone';

const REFUSALS: Record<How, { message: string; remedy: string }> = {
  'with others': {
    message: 'This database is being restored from a backup.',
    remedy: 'Wait until npm run restore has ended, then start again.',
  },
  alone: {
    message: 'A Refettle server or tool works with this database.',
    remedy: 'Stop it first (Ctrl-C, or systemctl stop refettle), then restore.',
  },
};

/** A lock of PostgreSQL that lasts as long as its connection: a process that dies leaves none behind. */
async function connectAndHold(databaseUrl: string, how: How): Promise<pg.Client> {
  const client = new pg.Client({
    connectionString: databaseUrl,
    application_name: 'refettle hold',
    keepAlive: true,
    connectionTimeoutMillis: ANSWERS_WITHIN_MS,
  });
  // Whoever waits for an answer hears it from the query; between queries it is heard by `end`.
  client.on('error', () => undefined);
  try {
    await client.connect();
    const lock = how === 'alone' ? 'pg_try_advisory_lock' : 'pg_try_advisory_lock_shared';
    const { rows } = await client.query<{ held: boolean }>(`select ${lock}($1) as held`, [LOCK.work]);
    if (rows[0]?.held !== true) throw new SetUpError(REFUSALS[how].message, REFUSALS[how].remedy);
    return client;
  } catch (error) {
    await client.end().catch(() => undefined);
    throw error;
  }
}

/** Holds the database for as long as the work takes. */
export async function whileHolding<T>(databaseUrl: string, how: How, work: () => Promise<T>): Promise<T> {
  const client = await connectAndHold(databaseUrl, how);
  try {
    return await work();
  } finally {
    await client.end();
  }
}

/**
 * Holds the database with others until the answer is called. A connection that is lost is made again; where a restore was quicker,
 * `restored` is told: what this server knows is no longer what is there.
 */
export async function keepHolding(databaseUrl: string, restored: (why: SetUpError) => void): Promise<() => Promise<void>> {
  let over = false;
  let timer: NodeJS.Timeout | undefined;
  let client: pg.Client | undefined;
  const hold = async (): Promise<void> => {
    const held = await connectAndHold(databaseUrl, 'with others');
    if (over) return held.end();
    client = held;
    held.once('end', () => {
      client = undefined;
      again(RECONNECT.firstMs);
    });
  };
  const again = (afterMs: number): void => {
    if (over) return;
    timer = setTimeout(() => {
      hold().catch((error: unknown) => {
        if (error instanceof SetUpError) restored(error);
        else again(Math.min(RECONNECT.mostMs, afterMs * 2));
      });
    }, afterMs);
    timer.unref();
  };
  await hold();
  return async () => {
    over = true;
    clearTimeout(timer);
    await client?.end().catch(() => undefined);
  };
}
