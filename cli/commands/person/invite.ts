import { roleSchema, ROLES, type Role } from '../../../shared/api/roles.js';
import type { Context } from '../../context.js';
import { UsageError } from '../../errors.js';
import { showLink } from './link-words.js';

export interface InviteOptions {
  email?: string;
  name?: string;
  role?: string;
  json?: boolean;
}

export function roleOf(text: string): Role {
  const parsed = roleSchema.safeParse(text.trim().toLowerCase());
  if (!parsed.success) throw new UsageError(`'${text}' is no role: ${ROLES.join(', ')}`);
  return parsed.data;
}

/** Puts somebody on the books and makes the link by which they set their password. */
export async function runPersonInvite(options: InviteOptions, context: Context): Promise<number> {
  const role = options.role === undefined ? undefined : roleOf(options.role);
  const email = options.email ?? (await context.prompt.text({ message: 'E-mail address', instead: 'give it behind the command' }));
  const name = options.name ?? (await context.prompt.text({ message: 'Name', instead: 'give it with --name' }));
  const chosen =
    role ??
    roleOf(
      await context.prompt.choice({
        message: 'Role',
        choices: ROLES.map((one) => ({ value: one, name: one })),
        instead: 'give it with --role',
      }),
    );
  return showLink(await (await context.api()).call('invitePerson', { body: { email, name, role: chosen } }), options.json, context);
}
