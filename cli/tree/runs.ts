import type { Command } from 'commander';
import { JSON_OPTION, RIG_OPTION, unitNumber, type Does } from './parts.js';

/** Bench runs: begun, gone on with, left. */
export function runCommands(program: Command, does: Does): void {
  program.commandsGroup('Bench runs:');
  program
    .command('run')
    .description('run a bench script on a unit')
    .argument('<script>', 'bench script, YAML')
    .argument('<unit>', 'unit number, like 0412', unitNumber)
    .option(...RIG_OPTION)
    .option('--unattended', 'ask nobody; on a real rig a script with a caution then does not begin')
    .option(...JSON_OPTION)
    .action((script: string, number: number, options: object) =>
      does(async () => (await import('../commands/run.js')).runScriptCommand)({ ...options, script, number }),
    );
}
