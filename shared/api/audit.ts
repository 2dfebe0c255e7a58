import { z } from 'zod';
import { pageQuerySchema } from './page.js';
import { roleSchema } from './roles.js';

/** What is put down in the audit log, in the words that follow the name of who did it. A new kind of change is a line here. */
export const AUDIT_WORDS = {
  'sign-in.ok': 'signed in',
  'sign-in.failed': 'failed to sign in',
  'first-admin.created': 'became the first admin by the one-time link',
  'person.created': 'added a person',
  'person.invited': 'invited a person',
  'person.joined': 'set a password by the invitation',
  'person.role-changed': 'changed a role',
  'person.deactivated': 'deactivated a person',
  'person.activated': 'reactivated a person',
  'person.link-made': 'made a one-time link',
  'person.password-reset': 'set a new password by a one-time link',
  'person.password-changed': 'changed their own password',
  'person.wrong-password': 'gave a wrong password for their own account',
  'session.ended': 'signed out',
  'session.revoked': 'ended a session',
  'sheet.added': 'added a service sheet',
  'tag.signed': 'signed a unit off',
  'tag.withdrawn': 'withdrew a tag',
  'bench.made': 'made a shared bench',
  'bench.token-renewed': 'gave a bench a new token',
  'bench.revoked': 'ended a bench’s token',
  'bench.first-sign-on': 'signed on at a bench for the first time',
  'bench.sign-on-failed': 'failed to sign on at a bench',
  'pin.set': 'set a PIN',
  'pin.cleared': 'took a PIN away',
  'override.recorded': 'opened a gate with a reason',
  'key.rotated': 'changed the signing key',
  'key.compromised': 'called the signing key compromised',
  'backup.restored': 'restored a backup',
} as const;

export type AuditWhat = keyof typeof AUDIT_WORDS;
export const AUDIT_WHATS = Object.keys(AUDIT_WORDS) as [AuditWhat, ...AuditWhat[]];

/** What a change was made to. */
export const auditSubjectSchema = z.strictObject({
  kind: z.enum(['person', 'session', 'sheet', 'unit', 'tag', 'bench', 'key', 'shop']),
  /** By which it is found again: an id, a unit's or a tag's number, a family. */
  id: z.string(),
  /** As people call it. */
  name: z.string(),
});
export type AuditSubject = z.infer<typeof auditSubjectSchema>;

/** The members that changed, in plain values; undefined where there was nothing before, or is nothing after. */
export const auditValuesSchema = z.record(z.string(), z.unknown());
export type AuditValues = z.infer<typeof auditValuesSchema>;

export const auditRowSchema = z.strictObject({
  id: z.number().int().positive(),
  at: z.iso.datetime(),
  /** Absent: nobody was signed in. */
  who: z.strictObject({ id: z.string(), name: z.string(), role: roleSchema }).optional(),
  what: z.enum(AUDIT_WHATS),
  subject: auditSubjectSchema,
  before: auditValuesSchema.optional(),
  after: auditValuesSchema.optional(),
});
export type AuditRow = z.infer<typeof auditRowSchema>;

const filters = {
  /** A person's id, e-mail address, or a part of the name. */
  who: z.string().min(1).max(320).optional(),
  what: z.enum(AUDIT_WHATS, { error: `is one of: ${AUDIT_WHATS.join(', ')}` }).optional(),
  /** A kind of subject, its id, or a part of its name. */
  subject: z.string().min(1).max(320).optional(),
  /** From this moment on. */
  from: z.iso.datetime({ offset: true, error: 'is a time like 2026-03-05T09:00:00Z' }).optional(),
  /** Before this moment. */
  to: z.iso.datetime({ offset: true, error: 'is a time like 2026-03-05T09:00:00Z' }).optional(),
};
export const auditFilterSchema = z.strictObject(filters);
export type AuditFilter = z.infer<typeof auditFilterSchema>;
export const auditQuerySchema = pageQuerySchema.extend(filters);
