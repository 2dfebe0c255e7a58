import type { Command } from 'commander';
import { JSON_OPTION, oneOf, plainNumber, RIG_OPTION, unitNumber, type Does } from './parts.js';

/** What is done to the unit on the bench. */
export function workCommands(program: Command, does: Does): void {
  program.commandsGroup('At the bench:');
  program
    .command('capture')
    .description('record the lamps of a unit')
    .argument('<unit>', 'unit number, like 0412', unitNumber)
    .option('--seconds <seconds>', 'how long (until you stop it, unless told)', plainNumber)
    .option(...RIG_OPTION)
    .option('--keys', 'no probe: tap the lamps with keys 1, 2, 3 …')
    .option('--file <file>', 'take a capture that was recorded before')
    .option('--sheet <file>', "decode by this sheet instead of the unit's own")
    .option('--out <file>', 'write the capture file here too')
    .option(...JSON_OPTION)
    .action((number: number, options: object) =>
      does(async () => (await import('../commands/capture.js')).runCapture)({ ...options, number }),
    );
  program
    .command('measure')
    .description("take one check of the unit's sheet")
    .argument('<unit>', 'unit number, like 0412', unitNumber)
    .argument('<check>', 'check of the sheet, like drain-pump-winding')
    .option('--value <value>', 'the reading, typed in from a handheld meter')
    .option('--accuracy <accuracy>', "that meter's, like 0.8%+3")
    .option('--resolution <value>', "the value of that meter's last digit")
    .option('--meter <id>', 'which meter it was')
    .addOption(oneOf('--verdict <verdict>', 'for a check that is looked at', ['pass', 'fail', 'inconclusive']))
    .option('--note <text>', 'what was seen, for a check that is looked at')
    .option(...RIG_OPTION)
    .option(...JSON_OPTION)
    .action((number: number, check: string, options: object) =>
      does(async () => (await import('../commands/measure.js')).runMeasure)({ ...options, number, check }),
    );
  program
    .command('repair')
    .description('put down what was mended')
    .argument('<unit>', 'unit number, like 0412', unitNumber)
    .option('--part <part>', 'the part, or what was done')
    .option('--source <source>', 'new, used:NUMBER (the unit it came from), or none')
    .option('--minutes <minutes>', 'how long it took', plainNumber)
    .option('--cost <money>', 'what the part cost, like 6.00')
    .option('--note <text>', 'a remark')
    .option(...JSON_OPTION)
    .action((number: number, options: object) =>
      does(async () => (await import('../commands/repair.js')).runRepair)({ ...options, number }),
    );
  program
    .command('override')
    .description('open the dead-test gate of a unit with a reason (a lead)')
    .argument('<unit>', 'unit number, like 0412', unitNumber)
    .option('--reason <text>', 'why; it is recorded')
    .option(...JSON_OPTION)
    .action((number: number, options: object) =>
      does(async () => (await import('../commands/override.js')).runOverride)({ ...options, number }),
    );
}
