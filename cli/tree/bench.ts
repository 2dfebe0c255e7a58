import type { Command } from 'commander';
import { JSON_OPTION, type Does } from './parts.js';

/** A computer that several people work at. */
export function benchCommands(program: Command, does: Does): void {
  program.commandsGroup('Who works here:');
  const bench = program.command('bench').description('a shared bench: several people, each by name and PIN');
  bench
    .command('join')
    .description('make this computer a shared bench, by the token that a lead has from the page Shared benches')
    .option('--token-stdin', 'read the token from standard input')
    .option(...JSON_OPTION)
    .action(does(async () => (await import('../commands/bench/join.js')).runBenchJoin));
  bench
    .command('show')
    .description('what this bench is: shop, rig, who stands at it, whom it has seen, what waits')
    .option(...JSON_OPTION)
    .action(does(async () => (await import('../commands/bench/show.js')).runBenchShow));
  bench
    .command('sign-on')
    .description('sign on at this bench ahead of a command; what needs a person asks by itself otherwise')
    .argument('[name]', 'your name, or your e-mail address where two have the same name')
    .option('--pin-stdin', 'read the PIN from standard input')
    .option(...JSON_OPTION)
    .action((name: string | undefined, options: object) =>
      does(async () => (await import('../commands/bench/sign-on.js')).runBenchSignOn)({ ...options, name }),
    );
  bench
    .command('leave')
    .description('this computer is no shared bench any more; what waits on it stays')
    .option(...JSON_OPTION)
    .action(does(async () => (await import('../commands/bench/leave.js')).runBenchLeave));
}
