import { InvalidArgumentError, type Command } from 'commander';
import { JSON_OPTION, type Does } from './parts.js';

const PERSON = ['<person>', 'e-mail address, or a name that is nobody else’s'] as const;

/** People, where they are signed in, and what they changed. */
export function peopleCommands(program: Command, does: Does): void {
  program.commandsGroup('People and sessions:');
  const person = program.command('person').description('the people of the shop (an admin)');
  person
    .command('list')
    .description('everybody: role, whether they can sign in, when they were last here')
    .option(...JSON_OPTION)
    .action(does(async () => (await import('../commands/person/list.js')).runPersonList));
  person
    .command('invite')
    .description('put somebody on the books; prints a one-time link by which they set their password')
    .argument('[email]', 'their e-mail address')
    .option('--name <name>', 'as it stands on logs and tags')
    .option('--role <role>', 'technician, lead, sales or admin')
    .option(...JSON_OPTION)
    .action((email: string | undefined, options: object) =>
      does(async () => (await import('../commands/person/invite.js')).runPersonInvite)({
        ...options,
        ...(email === undefined ? {} : { email }),
      }),
    );
  person
    .command('role')
    .description('change somebody’s role; nobody changes their own')
    .argument(...PERSON)
    .argument('<role>', 'technician, lead, sales or admin')
    .option(...JSON_OPTION)
    .action((who: string, role: string, options: object) =>
      does(async () => (await import('../commands/person/change.js')).runPersonRole)({ ...options, person: who, role }),
    );
  person
    .command('deactivate')
    .description('somebody no longer works here: every session ends at once, the history stays')
    .argument(...PERSON)
    .option('--reason <text>', 'why; it is kept in the audit log')
    .option(...JSON_OPTION)
    .action((who: string, options: object) =>
      does(async () => (await import('../commands/person/change.js')).runPersonDeactivate)({ ...options, person: who }),
    );
  person
    .command('activate')
    .description('somebody works here again')
    .argument(...PERSON)
    .option(...JSON_OPTION)
    .action((who: string, options: object) =>
      does(async () => (await import('../commands/person/change.js')).runPersonActivate)({ ...options, person: who }),
    );
  person
    .command('reset-password')
    .description('a one-time link for a forgotten password, or for an invitation that ran out')
    .argument(...PERSON)
    .option(...JSON_OPTION)
    .action((who: string, options: object) =>
      does(async () => (await import('../commands/person/change.js')).runPersonResetPassword)({ ...options, person: who }),
    );

  const session = program.command('session').description('where somebody is signed in');
  session
    .command('list')
    .description('the sessions and tokens that could be used now')
    .option('--person <person>', 'somebody else’s (an admin)')
    .option(...JSON_OPTION)
    .action(does(async () => (await import('../commands/session/list.js')).runSessionList));
  session
    .command('revoke')
    .description('end a session: its token is good for nothing from then on')
    .argument('[session]', 'as the list has it')
    .option('--person <person>', 'somebody else’s (an admin)')
    .option('--all', 'every one of that person; of one’s own, every other one')
    .option(...JSON_OPTION)
    .action((which: string | undefined, options: object) =>
      does(async () => (await import('../commands/session/revoke.js')).runSessionRevoke)({
        ...options,
        ...(which === undefined ? {} : { session: which }),
      }),
    );

  program
    .command('password')
    .description('change your password; your other sessions end')
    .option('--stdin', 'read the old and the new one from standard input, a line each')
    .option(...JSON_OPTION)
    .action(does(async () => (await import('../commands/password.js')).runPassword));
  program
    .command('audit')
    .description('who changed what, when, before and after (an admin)')
    .option('--who <person>', 'an e-mail address, an id, or a part of a name')
    .option('--what <kind>', 'a kind of change, like person.deactivated')
    .option('--subject <text>', 'what was changed: a kind, an id, or a part of its name')
    .option('--from <time>', 'from this day or moment on, like 2026-03-05')
    .option('--to <time>', 'up to this day (with it) or moment')
    .option('--limit <count>', 'how many, newest first', count)
    .option('--csv <file>', 'write all of it as CSV; - is standard output')
    .option(...JSON_OPTION)
    .action(does(async () => (await import('../commands/audit.js')).runAudit));
}

function count(text: string): number {
  const value = Number(text);
  if (!/^\d+$/.test(text) || value < 1) throw new InvalidArgumentError('Write a whole number from 1 up.');
  return value;
}
