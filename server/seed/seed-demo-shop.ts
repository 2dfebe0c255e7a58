import { randomBytes } from 'node:crypto';
import { chmodSync, existsSync, readFileSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { v7 as newId } from 'uuid';
import { z } from 'zod';
import { roleSchema, type Role } from '../../shared/api/roles.js';
import type { User } from '../../shared/api/sessions.js';
import type { AppDependencies } from '../app.js';
import { hashPassword } from '../auth/password.js';
import { anybodyThere, findPersonByEmail, insertPerson, setPassword } from '../auth/people-store.js';
import type { Db } from '../db.js';
import { addSheet } from '../features/sheets/sheets-service.js';
import { takeIn } from '../features/units/units-service.js';
import { findShop, insertShop } from '../history/shop-store.js';
import { packageRoot } from '../package-root.js';
import { SetUpError } from '../set-up-error.js';
import { DEMO_PEOPLE, DEMO_SHOP } from './demo-people.js';
import { DEMO_UNITS } from './demo-units.js';

export interface DemoAccount {
  role: Role;
  email: string;
  password: string;
}

const FILE = 'demo-accounts.json';
const OWNER_ONLY = 0o600;
/** 96 bits: nobody guesses it, somebody can type it. */
const PASSWORD_BYTES = 12;
const accountsSchema = z.array(z.strictObject({ role: roleSchema, email: z.string(), password: z.string() }));

/**
 * Fills the demo shop: people, a service sheet, units at the gate. Made at the first start; afterwards nothing is changed, but that
 * accounts whose file was lost get new passwords, so that somebody can sign in again.
 */
export async function seedDemoShop(deps: Pick<AppDependencies, 'db' | 'config' | 'clock'>): Promise<DemoAccount[]> {
  const path = join(deps.config.dataDir, FILE);
  const kept = readAccounts(path);
  const accounts = DEMO_PEOPLE.filter((person, index) => DEMO_PEOPLE.findIndex(({ role }) => role === person.role) === index).map(
    ({ role, email }): DemoAccount =>
      kept.find((account) => account.email === email) ?? { role, email, password: randomBytes(PASSWORD_BYTES).toString('base64url') },
  );
  const now = deps.clock();
  await deps.db.transaction(async (trx) => {
    const shop = await findShop(trx);
    if ((shop && !shop.demo) || (!shop && (await anybodyThere(trx)))) {
      throw new SetUpError(
        'This database holds a shop of your own, and the demo shop must not be mixed into it.',
        'Start it with REFETTLE_DEMO=0.',
      );
    }
    await insertShop(trx, DEMO_SHOP);
    const people = await seedPeople(trx, accounts, kept, now);
    if (!shop) await seedFloor(trx, people, now);
  });
  writeFileSync(path, `${JSON.stringify(accounts, null, 2)}\n`, { mode: OWNER_ONLY });
  chmodSync(path, OWNER_ONLY);
  return accounts;
}

function readAccounts(path: string): DemoAccount[] {
  if (!existsSync(path)) return [];
  try {
    return accountsSchema.parse(JSON.parse(readFileSync(path, 'utf8')));
  } catch (cause) {
    throw new SetUpError(`The file ${path} can't be read.`, 'Move it aside: the demo accounts then get new passwords.', { cause });
  }
}

async function seedPeople(db: Db, accounts: readonly DemoAccount[], kept: readonly DemoAccount[], now: Date): Promise<Map<Role, User>> {
  const people = new Map<Role, User>();
  for (const { role, email, name } of DEMO_PEOPLE) {
    const account = accounts.find((one) => one.email === email);
    const found = await findPersonByEmail(db, email);
    const user = found?.user ?? { id: newId(), name, email, role };
    if (!people.has(role)) people.set(role, user);
    if (found && (account === undefined || kept.some((one) => one.email === email))) continue;
    // Somebody without a line in the file has a password that nobody knows.
    const passwordHash = await hashPassword(account?.password ?? randomBytes(PASSWORD_BYTES).toString('base64url'));
    if (found) await setPassword(db, user.id, passwordHash, now);
    else await insertPerson(db, { ...user, passwordHash, createdAt: now });
  }
  return people;
}

async function seedFloor(db: Db, people: ReadonlyMap<Role, User>, now: Date): Promise<void> {
  const [lead, technician] = [people.get('lead'), people.get('technician')];
  if (!lead || !technician) throw new Error('The demo shop has no lead or no technician.');
  await addSheet(db, readFileSync(join(packageRoot, 'server/seed/shop/heron-h6.yaml'), 'utf8'), lead, now);
  for (const unit of DEMO_UNITS) await takeIn(db, unit, technician, now);
}
