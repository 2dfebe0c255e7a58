import { z } from 'zod';
import { shopSchema, type Shop } from '../../shared/api/sessions.js';
import type { Db } from '../db.js';

const shopRowSchema = z
  .object({
    name: z.string(),
    address: z.string(),
    phone: z.string(),
    currency: z.string(),
    demo: z.boolean(),
    four_eyes: z.boolean(),
    warranty_months: z.number(),
  })
  .transform(({ four_eyes: fourEyes, warranty_months: warrantyMonths, ...rest }): Shop =>
    shopSchema.parse({ ...rest, fourEyes, warrantyMonths }),
  );

/** What an empty shop begins with. */
export const EMPTY_SHOP: Shop = {
  name: 'My shop',
  address: '',
  phone: '',
  currency: 'GBP',
  demo: false,
  fourEyes: true,
  warrantyMonths: 12,
};

export async function findShop(db: Db): Promise<Shop | undefined> {
  const row: unknown = await db('shop').first();
  return row === undefined ? undefined : shopRowSchema.parse(row);
}

export const readShop = async (db: Db): Promise<Shop> => (await findShop(db)) ?? EMPTY_SHOP;

/** Does nothing where there is a shop. */
export async function insertShop(db: Db, shop: Shop): Promise<void> {
  const { fourEyes, warrantyMonths, ...rest } = shop;
  await db('shop')
    .insert({ ...rest, four_eyes: fourEyes, warranty_months: warrantyMonths })
    .onConflict('only_row')
    .ignore();
}
