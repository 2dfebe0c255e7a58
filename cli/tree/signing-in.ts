import type { Command } from 'commander';
import { JSON_OPTION, type Does } from './parts.js';

/** Who works here. */
export function signingInCommands(program: Command, does: Does): void {
  program.commandsGroup('Who works here:');
  program
    .command('sign-in')
    .description('sign in at the server; the token stays on this bench')
    .argument('[email]', 'your e-mail address')
    .option('--email <email>', 'the same, as an option')
    .option('--password-stdin', 'read the password from standard input')
    .option(...JSON_OPTION)
    .action((email: string | undefined, options: { email?: string }) =>
      does(async () => (await import('../commands/sign-in.js')).runSignIn)({ ...options, email: email ?? options.email }),
    );
  program
    .command('sign-out')
    .description('sign out: the token is revoked')
    .option(...JSON_OPTION)
    .action(does(async () => (await import('../commands/sign-out.js')).runSignOut));
  program
    .command('whoami')
    .description('who is signed in here, and at which server')
    .option(...JSON_OPTION)
    .action(does(async () => (await import('../commands/whoami.js')).runWhoami));
}
