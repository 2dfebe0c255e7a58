import { randomInt } from 'node:crypto';
import { chmodSync, existsSync, readFileSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { v7 as newId } from 'uuid';
import { z } from 'zod';
import { isEasyPin } from '../../shared/api/benches.js';
import { mayDo } from '../../shared/api/roles.js';
import type { AppDependencies } from '../app.js';
import { benchOfToken, insertBench, listBenches, newBenchToken, setBenchToken } from '../auth/bench-store.js';
import { hashPin } from '../auth/password.js';
import { findPersonByEmail } from '../auth/people-store.js';
import { findPinState, setPin } from '../auth/pin-store.js';
import type { Db } from '../db.js';
import { SetUpError } from '../set-up-error.js';
import { DEMO_PEOPLE } from './demo-people.js';

const FILE = 'demo-bench.json';
const OWNER_ONLY = 0o600;
const BENCH_NAME = 'bench-1';
const LARGEST_PIN = 10_000;

const accessSchema = z.strictObject({
  bench: z.string(),
  token: z.string(),
  pins: z.array(z.strictObject({ name: z.string(), role: z.string(), pin: z.string(), setAt: z.string() })),
});
/** How to get at the demo shop's shared bench: its token, and the PINs of those who may sign on there. */
export type DemoBenchAccess = z.infer<typeof accessSchema>;

/**
 * The shared bench of the demo shop, and PINs for its technicians and leads. Made once; afterwards nothing is changed, but that a token or
 * PINs whose file was lost are made anew. A PIN that somebody has set since is that person's, and is no longer told.
 */
export async function seedDemoBench(deps: Pick<AppDependencies, 'db' | 'config' | 'clock'>): Promise<DemoBenchAccess> {
  const path = join(deps.config.dataDir, FILE);
  const kept = readAccess(path);
  const now = deps.clock();
  const access = await deps.db.transaction(async (trx) => ({
    bench: BENCH_NAME,
    token: await seedBench(trx, kept, now),
    pins: await seedPins(trx, kept, now),
  }));
  writeFileSync(path, `${JSON.stringify(access, null, 2)}\n`, { mode: OWNER_ONLY });
  chmodSync(path, OWNER_ONLY);
  return access;
}

function readAccess(path: string): DemoBenchAccess | undefined {
  if (!existsSync(path)) return undefined;
  try {
    return accessSchema.parse(JSON.parse(readFileSync(path, 'utf8')));
  } catch (cause) {
    throw new SetUpError(`The file ${path} can't be read.`, 'Move it aside: the demo bench then gets a new token and new PINs.', { cause });
  }
}

async function seedBench(db: Db, kept: DemoBenchAccess | undefined, now: Date): Promise<string> {
  const bench = (await listBenches(db, undefined, 200)).find(({ name }) => name === BENCH_NAME);
  // One that somebody revoked stays revoked.
  if (kept && bench && (bench.revokedAt !== undefined || (await benchOfToken(db, kept.token, now)))) return kept.token;
  const token = newBenchToken();
  const lead = await findPersonByEmail(db, DEMO_PEOPLE.find(({ role }) => role === 'lead')?.email ?? '');
  if (!lead) throw new Error('The demo shop has no lead.');
  if (bench) await setBenchToken(db, bench.id, token);
  else await insertBench(db, { id: newId(), name: BENCH_NAME, token, by: lead.user, at: now });
  return token;
}

async function seedPins(db: Db, kept: DemoBenchAccess | undefined, now: Date): Promise<DemoBenchAccess['pins']> {
  const pins: DemoBenchAccess['pins'] = [];
  for (const { role, name, email } of DEMO_PEOPLE.filter((person) => mayDo(person.role, 'run.record'))) {
    const person = await findPersonByEmail(db, email);
    const setAt = person && (await findPinState(db, person.user.id))?.pinSetAt;
    if (!person?.active) continue;
    const told = kept?.pins.find((one) => one.name === name);
    if (setAt !== undefined && kept) {
      if (told?.setAt === setAt) pins.push(told);
      continue;
    }
    const pin = newPin(pins.map((one) => one.pin));
    await setPin(db, person.user.id, await hashPin(pin), person.user, now);
    pins.push({ name, role, pin, setAt: now.toISOString() });
  }
  return pins;
}

function newPin(taken: readonly string[]): string {
  const pin = String(randomInt(LARGEST_PIN)).padStart(4, '0');
  return taken.includes(pin) || isEasyPin(pin) ? newPin(taken) : pin;
}
