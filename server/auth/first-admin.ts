import { z } from 'zod';
import type { AppDependencies } from '../app.js';
import type { Db } from '../db.js';
import { EMPTY_SHOP, insertShop } from '../history/shop-store.js';
import { anybodyThere } from './people-store.js';
import { newToken, tokenHash } from './token.js';

const LINK_LASTS_MS = 24 * 3_600_000;
const EVERY_ADDRESS = new Set(['0.0.0.0', '::']);

/** Where a browser on this machine finds us. */
function ownAddress({ publicUrl, host, port }: AppDependencies['config']): string {
  if (publicUrl !== undefined) return publicUrl;
  const name = EVERY_ADDRESS.has(host) ? '127.0.0.1' : host;
  return `http://${name.includes(':') ? `[${name}]` : name}:${String(port)}`;
}

/** For a shop where nobody is yet: a link that makes its first admin, once. Each start makes a new one, and the old ones end. */
export async function createFirstAdminLink(deps: Pick<AppDependencies, 'db' | 'config' | 'clock'>): Promise<string | undefined> {
  const now = deps.clock();
  const token = newToken();
  const isNeeded = await deps.db.transaction(async (trx) => {
    await insertShop(trx, EMPTY_SHOP);
    if (await anybodyThere(trx)) return false;
    await trx('first_admin_links').delete();
    await trx('first_admin_links').insert({
      token_hash: tokenHash(token),
      created_at: now,
      expires_at: new Date(now.getTime() + LINK_LASTS_MS),
    });
    return true;
  });
  return isNeeded ? `${ownAddress(deps.config)}/first-admin?token=${token}` : undefined;
}

/** True once a link: two who send it at the same moment get one yes between them. */
export async function useFirstAdminLink(db: Db, token: string, now: Date): Promise<boolean> {
  const used = z.number().parse(
    await db('first_admin_links')
      .where({ token_hash: tokenHash(token) })
      .where('expires_at', '>', now)
      .delete(),
  );
  return used === 1 && !(await anybodyThere(db));
}
