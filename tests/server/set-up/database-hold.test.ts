import { afterAll, beforeAll, expect, test } from 'vitest';
import { keepHolding, whileHolding } from '../../../server/database-hold.js';
import { SetUpError } from '../../../server/set-up-error.js';
import { freshDatabase, type FreshDatabase } from '../../helpers/fresh-database.js';

let database: FreshDatabase;
beforeAll(async () => {
  database = await freshDatabase({ empty: true });
});
afterAll(() => database.drop());

const never = (): void => expect.unreachable();
const alone = (work = (): Promise<string> => Promise.resolve('restored')) => whileHolding(database.url, 'alone', work);
const holders = async (): Promise<number[]> =>
  database
    .db('pg_stat_activity')
    .whereRaw('datname = current_database()')
    .where({ application_name: 'refettle hold' })
    .pluck<number[]>('pid');
/** As when PostgreSQL is restarted, or a cable is pulled. */
const cut = async (pid: number | undefined): Promise<void> => void (await database.db.raw('select pg_terminate_backend(?)', [pid ?? 0]));

test('When servers and tools work with it, then none of them is in another’s way, and a restore is refused until the last one has left', async () => {
  const releaseOne = await keepHolding(database.url, never);
  const releaseOther = await keepHolding(database.url, never);
  expect(await whileHolding(database.url, 'with others', () => Promise.resolve('backed up'))).toBe('backed up');
  await releaseOne();
  await expect(alone()).rejects.toMatchObject({ message: 'A Refettle server or tool works with this database.' });
  await releaseOther();
  expect(await alone()).toBe('restored');
});

test('When it is being restored, then no server starts with it, and no second restore', async () => {
  await alone(async () => {
    await expect(keepHolding(database.url, never)).rejects.toBeInstanceOf(SetUpError);
    await expect(alone()).rejects.toBeInstanceOf(SetUpError);
    return '';
  });
  // Also where the work fails, nobody is kept out afterwards.
  await expect(alone(() => Promise.reject(new Error('disk full')))).rejects.toThrow('disk full');
  await (
    await keepHolding(database.url, never)
  )();
});

test('When the connection of a server is lost, then it holds the database again', async () => {
  const release = await keepHolding(database.url, never);
  const [before] = await holders();
  await cut(before);
  await expect.poll(holders, { timeout: 30_000 }).not.toEqual([before]);
  await expect.poll(() => alone().catch((error: unknown) => String(error)), { timeout: 30_000 }).toContain('works with this database');
  await release();
  expect(await alone()).toBe('restored');
});

test('When a restore takes it in that moment, then the server is told that it works with what is no longer there', async () => {
  let told: SetUpError | undefined;
  const release = await keepHolding(database.url, (why) => (told = why));
  // Tried until it is quicker than the server, which waits a tenth of a second before it comes back.
  const tryAlone = async (): Promise<boolean> => {
    await cut((await holders())[0]);
    return alone(async () => {
      await expect.poll(() => told?.message, { timeout: 30_000 }).toContain('being restored');
      return '';
    }).then(
      () => true,
      () => false,
    );
  };
  await expect.poll(tryAlone, { timeout: 60_000 }).toBe(true);
  await release();
});
