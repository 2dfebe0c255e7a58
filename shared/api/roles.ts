import { z } from 'zod';

export const roleSchema = z.enum(['technician', 'lead', 'sales', 'admin']);
export type Role = z.infer<typeof roleSchema>;
export const ROLES = roleSchema.options;

/**
 * Which role may do what: the one table. The server asks it, OpenAPI prints it as `x-roles`, the web's menus follow it,
 * and the tests walk it. `public` needs no sign-in.
 */
export const ROLES_BY_ACTION = {
  'health.read': ['public'],
  'session.create': ['public'],
  'first-admin.create': ['public'],
  'public-tag.read': ['public'],
  'session.end': ['technician', 'lead', 'sales', 'admin'],
  'me.read': ['technician', 'lead', 'sales', 'admin'],
  'unit.read': ['technician', 'lead', 'sales', 'admin'],
  'unit.take-in': ['technician', 'lead'],
  'sheet.read': ['technician', 'lead', 'sales', 'admin'],
  'sheet.write': ['lead'],
  'capture.record': ['technician', 'lead'],
  'reading.record': ['technician', 'lead'],
  'repair.record': ['technician', 'lead'],
  'run.record': ['technician', 'lead'],
  'override.record': ['lead'],
  'unit.sign-off': ['lead'],
  'tag.read': ['technician', 'lead', 'sales', 'admin'],
  'tag.withdraw': ['lead'],
  'person.read': ['admin'],
  'person.create': ['admin'],
} as const satisfies Record<string, readonly (Role | 'public')[]>;

export type Action = keyof typeof ROLES_BY_ACTION;

/**
 * Whether a role may do something. Nobody (`undefined`) may do only what is public.
 *
 * @example mayDo('sales', 'unit.sign-off') // false
 */
export function mayDo(role: Role | undefined, action: Action): boolean {
  const allowed: readonly (Role | 'public')[] = ROLES_BY_ACTION[action];
  return allowed.includes('public') || (role !== undefined && allowed.includes(role));
}
