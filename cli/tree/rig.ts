import type { Command } from 'commander';
import { JSON_OPTION, type Does } from './parts.js';

/** The instruments of this bench. */
export function rigCommands(program: Command, does: Does): void {
  program.commandsGroup('Instruments:');
  const rig = program.command('rig').description('the instruments of this bench and the ports they hang on');
  rig
    .command('check')
    .description('ask every port who is there, find the order of the sensors, write the rig file')
    .option('--port <port...>', 'only these ports')
    .option('--sheet <file>', 'service sheet whose panel the sensors hang on')
    .option('--family <family>', 'the same, from the shop: its control family')
    .option('--name <name>', 'what this bench is called')
    .option('--rig <file>', 'the rig file (else rig.yaml in REFETTLE_HOME)')
    .option('--write', 'write what was found without asking; the old file is kept')
    .option(...JSON_OPTION)
    .action(does(async () => (await import('../commands/rig/check.js')).runRigCheck));
  rig
    .command('show')
    .description('the rig as it is understood; opens no port')
    .option('--rig <rig>', 'rig file, or sim:NAME')
    .option(...JSON_OPTION)
    .action(does(async () => (await import('../commands/rig/show.js')).runRigShow));
}
