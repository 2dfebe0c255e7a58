import type { Command } from 'commander';
import { JSON_OPTION, type Does } from './parts.js';

/** What needs no server and no sign-in. */
export function commandsWithoutServer(program: Command, does: Does): void {
  program.commandsGroup('Without a server:');
  program
    .command('decode')
    .description('what lamp captures say; needs no server')
    .argument('<file...>', 'capture files (NAME.lamps.ndjson)')
    .requiredOption('--sheet <sheet>', 'service sheet, YAML or JSON')
    .option('--min-confidence <p>', 'how sure a code must be to be stated (0.999 unless told)')
    .option(...JSON_OPTION)
    .action((files: string[], options: { sheet: string; minConfidence?: string; json?: boolean }) =>
      does(async () => (await import('../commands/without-server.js')).decodeInContext)({ ...options, files }),
    );
  program
    .command('judge')
    .description('whether a reading lies inside its limits; needs no server')
    .requiredOption('--value <value>', 'the reading, like 12.41k')
    .requiredOption('--unit <unit>', 'its unit; echoed, never converted')
    .option('--low <limit>', 'lower limit')
    .option('--high <limit>', 'upper limit')
    .requiredOption('--accuracy <accuracy>', "the meter's, like 0.8%+3")
    .requiredOption('--resolution <value>', "the value of the meter's last digit")
    .option('--coverage <factor>', 'coverage factor (2 unless told)')
    .option(...JSON_OPTION)
    .action(does(async () => (await import('../commands/without-server.js')).judgeInContext));
}
