import { z } from 'zod';
import type { AppDependencies } from '../app.js';
import type { Db } from '../db.js';
import { EMPTY_SHOP, insertShop } from '../history/shop-store.js';
import { anybodyThere } from './people-store.js';
import { newToken, tokenHash } from './token.js';

const LINK_LASTS_MS = 24 * 3_600_000;

/** Where the admin's browser finds us. What faces the street shows no sign-in, so a public address is of use only where it shows all. */
const baseOf = ({ publicUrl, publicListener }: AppDependencies['config'], ownAddress: string): string =>
  publicListener === undefined ? (publicUrl ?? ownAddress) : ownAddress;

/** For a shop where nobody is yet: a link that makes its first admin, once, its token behind `#` as in every one-time link. Each start makes a new one, and the old ones end. */
export async function createFirstAdminLink(
  deps: Pick<AppDependencies, 'db' | 'config' | 'clock'>,
  ownAddress: string,
): Promise<string | undefined> {
  const now = deps.clock();
  const token = newToken();
  const isNeeded = await deps.db.transaction(async (trx) => {
    await insertShop(trx, EMPTY_SHOP);
    if (await anybodyThere(trx)) return false;
    await deleteFirstAdminLinks(trx);
    await trx('first_admin_links').insert({
      token_hash: tokenHash(token),
      created_at: now,
      expires_at: new Date(now.getTime() + LINK_LASTS_MS),
    });
    return true;
  });
  return isNeeded ? `${baseOf(deps.config, ownAddress)}/first-admin#${token}` : undefined;
}

/** What was printed before no longer makes anybody an admin; the next start prints a new one where nobody is there. */
export async function deleteFirstAdminLinks(db: Db): Promise<void> {
  await db('first_admin_links').delete();
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
