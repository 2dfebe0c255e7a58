import { z } from 'zod';

export const MANIFEST = 'manifest.json';
/** In the form of sha256sum, so that a backup can be checked by hand: `tar -xf FILE && sha256sum -c SHA256SUMS`. */
export const CHECKSUMS = 'SHA256SUMS';
export const DATABASE = 'database.dump';
/** What lay in the data folder. */
export const FILES = 'files';

export const manifestSchema = z.strictObject({
  format: z.literal('refettle.backup'),
  version: z.literal(1),
  madeAt: z.iso.datetime(),
  /** Names of the migrations that the database has been through. */
  migrations: z.array(z.string()),
  postgresMajor: z.number().int(),
  shop: z.strictObject({ name: z.string(), demo: z.boolean() }).optional(),
  counts: z.strictObject({ people: z.number(), units: z.number(), tags: z.number() }),
  /** The settings by environment that were set, but for the one that holds a password. For reading: nothing sets them again. */
  settings: z.record(z.string(), z.string()),
});
export type Manifest = z.infer<typeof manifestSchema>;
