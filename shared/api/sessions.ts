import { z } from 'zod';
import { roleSchema } from './roles.js';

export const userSchema = z.strictObject({ id: z.string(), name: z.string(), email: z.string(), role: roleSchema });
export type User = z.infer<typeof userSchema>;

export const signInSchema = z.strictObject({
  email: z.string().min(1, 'type your e-mail address').max(320),
  password: z.string().min(1, 'type your password').max(1024),
  /** Where the token goes: in the answer (terminal), or in an HttpOnly cookie (browser). */
  keep: z.literal('cookie').optional(),
});
export const signedInSchema = z.strictObject({ token: z.string().optional(), user: userSchema });

export const shopSchema = z.strictObject({
  name: z.string(),
  address: z.string(),
  phone: z.string(),
  currency: z.string(),
  /** The demo shop: its tags print SAMPLE, and simulated results count in it. */
  demo: z.boolean(),
  /** Off only in a one-person shop; the tag then says so. */
  fourEyes: z.boolean(),
  warrantyMonths: z.number().int(),
});
export type Shop = z.infer<typeof shopSchema>;
export const meSchema = z.strictObject({ user: userSchema, shop: shopSchema });

export const newPasswordSchema = z.string().min(12, 'at least 12 characters').max(1024);
export const newPersonSchema = z.strictObject({
  email: z.email('type an e-mail address').max(320),
  name: z.string().min(1, 'type a name').max(100),
  role: roleSchema,
  password: newPasswordSchema,
});
export const firstAdminSchema = z.strictObject({
  token: z.string().min(1),
  email: z.email('type an e-mail address').max(320),
  name: z.string().min(1, 'type a name').max(100),
  password: newPasswordSchema,
});
export const personSchema = userSchema;
