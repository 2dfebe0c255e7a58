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
  'live.tell': ['technician', 'lead'],
  'live.hear': ['technician', 'lead', 'sales', 'admin'],
  'override.record': ['lead'],
  'unit.sign-off': ['lead'],
  'tag.read': ['technician', 'lead', 'sales', 'admin'],
  'tag.withdraw': ['lead'],
  'person.read': ['admin'],
  'person.create': ['admin'],
  'person.change': ['admin'],
  'person-link.use': ['public'],
  'session.read': ['admin'],
  'session.revoke': ['admin'],
  'own-session.read': ['technician', 'lead', 'sales', 'admin'],
  'own-session.revoke': ['technician', 'lead', 'sales', 'admin'],
  'own-password.change': ['technician', 'lead', 'sales', 'admin'],
  'audit.read': ['admin'],
  'bench.read': ['lead', 'admin'],
  'bench.write': ['lead', 'admin'],
  'pin.read': ['lead', 'admin'],
  'pin.write': ['lead', 'admin'],
  'own-pin.write': ['technician', 'lead', 'sales', 'admin'],
  // For the token of a shared bench and for nobody's own: see ACTIONS_OF_A_BENCH.
  'bench.self': [],
  'bench.sign-on': [],
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

/**
 * What the token of a shared bench may do: the other table. `alone`: the bench itself, whoever stands at it. `person`: only as somebody
 * who has signed on at this bench, and only what that person's role may do. What is not here, a bench never does.
 */
export const ACTIONS_OF_A_BENCH = {
  'bench.self': 'alone',
  'bench.sign-on': 'alone',
  'unit.read': 'alone',
  'sheet.read': 'alone',
  'tag.read': 'alone',
  'me.read': 'person',
  'unit.take-in': 'person',
  'capture.record': 'person',
  'reading.record': 'person',
  'repair.record': 'person',
  'run.record': 'person',
  'live.tell': 'person',
  'override.record': 'person',
} as const satisfies Partial<Record<Action, 'alone' | 'person'>>;

/**
 * How a shared bench's token may do something: by itself, as somebody who has signed on at it, or not at all (`undefined`).
 *
 * @example benchMay('run.record') // 'person'
 * @example benchMay('unit.sign-off') // undefined
 */
export function benchMay(action: Action): 'alone' | 'person' | undefined {
  return (ACTIONS_OF_A_BENCH as Partial<Record<Action, 'alone' | 'person'>>)[action];
}
