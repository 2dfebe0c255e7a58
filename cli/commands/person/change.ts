import type { PersonRow } from '../../../shared/api/people.js';
import type { Context } from '../../context.js';
import { EXIT } from '../../exit-codes.js';
import { printJson } from '../../render/json.js';
import { findPerson } from './find-person.js';
import { roleOf } from './invite.js';
import { showLink } from './link-words.js';

interface Of {
  person: string;
  json?: boolean;
}

function say(person: PersonRow, sentence: string, { json }: Of, context: Context): number {
  if (json === true) printJson(context, person);
  else context.stdout.write(`${person.name} ${sentence}\n`);
  return EXIT.good;
}

export async function runPersonRole(options: Of & { role: string }, context: Context): Promise<number> {
  const role = roleOf(options.role);
  const api = await context.api();
  const { id } = await findPerson(api, options.person);
  const person = await api.call('changeRole', { params: { id }, body: { role } });
  return say(person, `is ${role} from now on.`, options, context);
}

/** Every session ends at once; what they did stays theirs. */
export async function runPersonDeactivate(options: Of & { reason?: string }, context: Context): Promise<number> {
  const api = await context.api();
  const found = await findPerson(api, options.person);
  const reason =
    options.reason ??
    (await context.prompt.text({
      message: `Why ${found.name} (${found.role}) is shut out`,
      refuse: (text) => (text === '' ? 'say why: it is kept' : undefined),
      instead: 'give it with --reason',
    }));
  const person = await api.call('deactivatePerson', { params: { id: found.id }, body: { reason } });
  return say(person, 'is deactivated: every session has ended, and the history stays.', options, context);
}

export async function runPersonActivate(options: Of, context: Context): Promise<number> {
  const api = await context.api();
  const { id } = await findPerson(api, options.person);
  const person = await api.call('activatePerson', { params: { id } });
  return say(
    person,
    person.state === 'invited'
      ? 'is back, and has no password yet: refettle person reset-password makes a link.'
      : 'is back, and signs in with the password of before.',
    options,
    context,
  );
}

/** For a forgotten password, or an invitation that ran out. */
export async function runPersonResetPassword(options: Of, context: Context): Promise<number> {
  const api = await context.api();
  const { id } = await findPerson(api, options.person);
  return showLink(await api.call('makeLink', { params: { id } }), options.json, context);
}
