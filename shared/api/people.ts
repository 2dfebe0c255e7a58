import { z } from 'zod';
import { roleSchema } from './roles.js';
import { newPasswordSchema, userSchema } from './sessions.js';

export const personStateSchema = z.enum(['invited', 'active', 'deactivated']);
export type PersonState = z.infer<typeof personStateSchema>;

/** What a one-time link is for: the first password of somebody invited, or another one for somebody who forgot theirs. */
export const linkKindSchema = z.enum(['invitation', 'reset']);
export type LinkKind = z.infer<typeof linkKindSchema>;

export const personRowSchema = userSchema.extend({
  state: personStateSchema,
  addedAt: z.iso.datetime(),
  /** When a session of theirs was last used; absent: not within the last month. */
  lastUsedAt: z.iso.datetime().optional(),
  /** How many sessions could be used now. */
  sessions: z.number().int().nonnegative(),
  /** A one-time link that can still be used. */
  link: z.strictObject({ kind: linkKindSchema, expiresAt: z.iso.datetime() }).optional(),
});
export type PersonRow = z.infer<typeof personRowSchema>;

export const inviteSchema = z.strictObject({
  email: z.email('type an e-mail address').max(320),
  name: z.string().trim().min(1, 'type a name').max(100),
  role: roleSchema,
});

/** A one-time link as its maker sees it, once: only its hash is kept. */
export const madeLinkSchema = z.strictObject({
  person: personRowSchema,
  link: z.strictObject({
    url: z.string(),
    kind: linkKindSchema,
    expiresAt: z.iso.datetime(),
    /** Its address is this machine's own: it opens nowhere else. */
    onlyHere: z.boolean(),
  }),
});
export type MadeLink = z.infer<typeof madeLinkSchema>;

export const changeRoleSchema = z.strictObject({ role: roleSchema });
export const deactivateSchema = z.strictObject({ reason: z.string().trim().min(1, 'say why').max(500) });

export const lookAtLinkSchema = z.strictObject({ token: z.string().min(1).max(200) });
export const linkPageSchema = z.strictObject({
  name: z.string(),
  email: z.string(),
  kind: linkKindSchema,
  shop: z.string(),
  expiresAt: z.iso.datetime(),
});
export const useLinkSchema = z.strictObject({ token: z.string().min(1).max(200), password: newPasswordSchema });

export const changePasswordSchema = z.strictObject({
  oldPassword: z.string().min(1, 'type your password').max(1024),
  newPassword: newPasswordSchema,
});

export const sessionRowSchema = z.strictObject({
  id: z.uuid(),
  /** `terminal on NAME`, or the kind of browser. */
  from: z.string(),
  createdAt: z.iso.datetime(),
  /** To the minute; absent: never since it was made. */
  lastUsedAt: z.iso.datetime().optional(),
  expiresAt: z.iso.datetime(),
  /** The one that asks. */
  current: z.boolean(),
});
export type SessionRow = z.infer<typeof sessionRowSchema>;
export const sessionsEndedSchema = z.strictObject({ ended: z.number().int().nonnegative() });
