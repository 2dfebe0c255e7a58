// A demo shop as the first release left it: its database, its signing key, and what is known of it. Everything in it is invented, and
// its secrets open nothing else.
import { copyFileSync, readFileSync } from 'node:fs';
import { join } from 'node:path';
import { brotliDecompressSync } from 'node:zlib';
import pg from 'pg';
import { z } from 'zod';
import { ROLES, roleSchema, type Role } from '../../shared/api/roles.js';
import { freshDatabase, type FreshDatabase } from './fresh-database.js';
import type { SignedInPerson } from './test-server.js';

const folder = join(import.meta.dirname, '../fixtures/first-release');

export const firstRelease = z
  .strictObject({
    accounts: z.array(z.strictObject({ role: roleSchema, email: z.string(), password: z.string() })),
    tokens: z.record(roleSchema, z.string()),
    tags: z.record(z.string(), z.strictObject({ signature: z.string(), word: z.string(), standing: z.enum(['stands', 'withdrawn']) })),
  })
  .parse(JSON.parse(readFileSync(join(folder, 'known.json'), 'utf8')));

/** Soon after it was left: its sessions last a month. */
export const SOON_AFTER = new Date('2026-12-02T09:00:00Z');

/** As it was left: through the first migration and no other. */
export async function firstReleaseDatabase(): Promise<FreshDatabase> {
  const fresh = await freshDatabase({ empty: true });
  const client = new pg.Client({ connectionString: fresh.url });
  await client.connect();
  try {
    await client.query(brotliDecompressSync(readFileSync(join(folder, 'database.sql.br'))).toString());
  } finally {
    await client.end();
  }
  return fresh;
}

export const placeFirstReleaseKey = (dataDir: string): void => {
  copyFileSync(join(folder, 'signing-key.pem'), join(dataDir, 'signing-key.pem'));
};

/** Its people, with the tokens that they held. */
export async function firstReleasePeople({ db }: FreshDatabase): Promise<Record<Role, SignedInPerson>> {
  const people = {} as Record<Role, SignedInPerson>;
  for (const role of ROLES) {
    const email = firstRelease.accounts.find((account) => account.role === role)?.email ?? '';
    const { id, name } = z.object({ id: z.string(), name: z.string() }).parse(await db('people').where({ email }).first('id', 'name'));
    people[role] = { id, name, email, role, token: firstRelease.tokens[role] };
  }
  return people;
}
