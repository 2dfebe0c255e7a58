import type { Command } from 'commander';
import { JSON_OPTION, RIG_OPTION, unitNumber, type Does } from './parts.js';

/** Bench runs: begun, gone on with, left. */
export function runCommands(program: Command, does: Does): void {
  program.commandsGroup('Bench runs:');
  program
    .command('run')
    .description('run a bench script on a unit')
    .argument('<script>', 'bench script: a file, or the name of one in REFETTLE_HOME/scripts or of the demo shop')
    .argument('<unit>', 'unit number, like 0412', unitNumber)
    .option(...RIG_OPTION)
    .option('--unattended', 'ask nobody; on a real rig a script with a caution then does not begin')
    .option(...JSON_OPTION)
    .action((script: string, number: number, options: object) =>
      does(async () => (await import('../commands/run.js')).runScriptCommand)({ ...options, script, number }),
    );
  program
    .command('resume')
    .description('go on with a run where it was left')
    .argument('[run]', "the run's id, or its unit's number")
    .option(...RIG_OPTION)
    .option('--unattended', 'ask nobody; on a real rig a script with a caution then does not go on')
    .option(...JSON_OPTION)
    .action((run: string | undefined, options: object) =>
      does(async () => (await import('../commands/resume.js')).runResume)({ ...options, run }),
    );
  program
    .command('abandon')
    .description('close a run that nobody will go on with; what it recorded is kept and sent')
    .argument('[run]', "the run's id, or its unit's number")
    .option('--reason <text>', 'why; it stands in the log')
    .option(...JSON_OPTION)
    .action((run: string | undefined, options: object) =>
      does(async () => (await import('../commands/abandon.js')).runAbandon)({ ...options, run }),
    );
  program
    .command('runs')
    .description('the runs of this bench: going, parked, broken off, closed and waiting')
    .option(...JSON_OPTION)
    .action(does(async () => (await import('../commands/runs.js')).runRuns));
}
