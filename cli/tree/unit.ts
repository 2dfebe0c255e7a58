import type { Command } from 'commander';
import { JSON_OPTION, oneOf, plainNumber, unitNumber, type Does } from './parts.js';

// Written out, because the schemas they come from would be loaded for every help text; a test holds them together.
const APPLIANCES = ['washing machine', 'dryer', 'dishwasher', 'oven', 'gas hob', 'fridge', 'microwave oven', 'other'];
const STAGES = ['intake', 'testing', 'repair', 'proving', 'signed off', 'sold', 'returned'];

/** Units. */
export function unitCommands(program: Command, does: Does): void {
  program.commandsGroup('Units:');
  const unit = program.command('unit').description('units: the appliances on the books');
  unit
    .command('new')
    .description('take in a unit; asks for what is missing')
    .addOption(oneOf('--appliance <kind>', 'what it is', APPLIANCES))
    .option('--maker <maker>', 'as the rating plate has it')
    .option('--model <model>', 'as the rating plate has it')
    .option('--serial <serial>', 'as the rating plate has it')
    .option('--plate-unreadable', 'the plate has no serial that can be read')
    .addOption(oneOf('--class <class>', 'protection class', ['I', 'II', 'III']))
    .option('--volts <volts>', 'rated volts', plainNumber)
    .option('--hertz <hertz>', 'rated hertz', plainNumber)
    .option('--watts <watts>', 'rated watts', plainNumber)
    .option('--amperes <amperes>', 'rated amperes', plainNumber)
    .option('--mass <kg>', 'mass in kilograms', plainNumber)
    .option('--family <family>', 'control family: the service sheet it goes by')
    .option('--complaint <text>', 'what the machine is said to do')
    .option('--source <text>', 'where it came from')
    .option('--cost <money>', 'what was paid for it, like 12.50')
    .addOption(
      oneOf('--same-serial <reason>', 'take it in although the serial is on the books', ['bought back', 'plate unreadable', 'other']),
    )
    .option(...JSON_OPTION)
    .action(does(async () => (await import('../commands/unit/new.js')).runUnitNew));
  unit
    .command('show')
    .description('a unit: plate, stage, what is missing until ready, history')
    .argument('<unit>', 'unit number, like 0412', unitNumber)
    .option(...JSON_OPTION)
    .action((number: number, options: { json?: boolean }) =>
      does(async () => (await import('../commands/unit/show.js')).runUnitShow)({ ...options, number }),
    );
  unit
    .command('family')
    .description('give a unit that came in without one its control family: the service sheet it goes by')
    .argument('<unit>', 'unit number, like 0412', unitNumber)
    .argument('<family>', 'control family, like heron-h6')
    .option(...JSON_OPTION)
    .action((number: number, family: string, options: { json?: boolean }) =>
      does(async () => (await import('../commands/unit/family.js')).runUnitFamily)({ ...options, number, family }),
    );
  unit
    .command('list')
    .description('the units, newest first')
    .option('--find <text>', 'a number, a maker, a model, a serial')
    .addOption(oneOf('--stage <stage>', 'only units that are there', STAGES))
    .option('--limit <count>', 'how many at most', plainNumber)
    .option(...JSON_OPTION)
    .action(does(async () => (await import('../commands/unit/list.js')).runUnitList));
}
