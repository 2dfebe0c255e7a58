import { z } from 'zod';
import { ruleResultSchema } from '../readiness/readiness.js';
import { shopSchema } from './sessions.js';
import { ratingPlateSchema, tagStateSchema } from './units.js';

/**
 * What a readiness tag says, and what its signature covers. Written once at sign-off and never changed.
 * Reading, limit and spread are words already (`formatReading`), so that paper, terminal and page cannot differ.
 */
export const tagContentSchema = z.strictObject({
  tag: z.string(),
  /** Four characters for who cannot scan. */
  lookUpWord: z.string(),
  /** Printed across the tag where its results are simulated. */
  sample: z.boolean(),
  appliance: z.string(),
  plate: ratingPlateSchema,
  tested: z.array(
    z.strictObject({
      title: z.string(),
      reading: z.string(),
      spread: z.string().optional(),
      limit: z.string(),
      verdict: z.literal('pass'),
      lamps: z.array(z.boolean()).optional(),
    }),
  ),
  mended: z.array(z.strictObject({ part: z.string(), source: z.enum(['new', 'used', 'none']), at: z.string(), by: z.string() })),
  signedOffAt: z.string(),
  signedOffBy: z.string(),
  fourEyes: z.boolean(),
  warrantyMonths: z.number().int(),
  cautions: z.array(z.string()),
  shop: shopSchema.pick({ name: true, address: true, phone: true }),
});
export type TagContent = z.infer<typeof tagContentSchema>;

export const tagPageSchema = z.strictObject({
  content: tagContentSchema,
  state: tagStateSchema,
  withdrawn: z.strictObject({ at: z.string(), reason: z.string() }).optional(),
  /** Where the QR code points: the public page of this tag, with its signature. */
  url: z.string(),
  /** The whole tag as a compact JWS, EdDSA over Ed25519 (RFC 7515, RFC 8037). */
  jws: z.string(),
});
export type TagPage = z.infer<typeof tagPageSchema>;

export const signOffSchema = z.strictObject({
  /** The rules as the lead saw them, by id: the sign-off is refused when they have changed since. */
  seen: z.array(ruleResultSchema.pick({ id: true, state: true })),
});
export const withdrawTagSchema = z.strictObject({ reason: z.string().trim().min(5, 'say why, for the tag’s page').max(500) });

export const publicTagQuerySchema = z.strictObject({ signature: z.string().max(200).optional(), word: z.string().max(20).optional() });
/** What a buyer sees. `not ours`: no such tag, or the signature or the look-up word does not match it; says nothing about any unit. */
export const publicTagSchema = z.discriminatedUnion('standing', [
  z.strictObject({ standing: z.literal('stands'), content: tagContentSchema, checkedAt: z.string(), jws: z.string() }),
  z.strictObject({
    standing: z.literal('withdrawn'),
    content: tagContentSchema,
    checkedAt: z.string(),
    withdrawnAt: z.string(),
    jws: z.string(),
  }),
  z.strictObject({
    standing: z.literal('not ours'),
    reason: z.string(),
    checkedAt: z.string(),
    shop: shopSchema.pick({ name: true, address: true, phone: true }),
  }),
]);
export type PublicTag = z.infer<typeof publicTagSchema>;

/** A JWK Set (RFC 7517) of Ed25519 keys (RFC 8037): with it anybody checks a tag's JWS, without asking the shop about the tag. */
export const publicKeysSchema = z.strictObject({
  keys: z.array(
    z.strictObject({
      kty: z.literal('OKP'),
      crv: z.literal('Ed25519'),
      x: z.string(),
      kid: z.string(),
      use: z.literal('sig'),
      alg: z.literal('EdDSA'),
    }),
  ),
});
export type PublicKeys = z.infer<typeof publicKeysSchema>;
