import { Option, type Command } from 'commander';
import type { LabelOptions } from '../commands/label.js';
import type { TagOptions } from '../commands/tag.js';
import { LABEL_FORMATS, TAG_FORMATS, USUAL_LABEL } from '../../shared/paper/sizes.js';
import { JSON_OPTION, unitNumber, type Does } from './parts.js';

const PDF_OPTION = ['--pdf <file>', 'write it as a PDF of its exact size'] as const;
const PRINT_OPTION = ['--print', 'hand it to the printer: lp, or the command in REFETTLE_PRINT'] as const;
const PRINTER_OPTION = ['--printer <name>', 'which printer (else the usual one)'] as const;

/** What is printed. */
export function paperCommands(program: Command, does: Does): void {
  program.commandsGroup('Paper:');
  program
    .command('tag')
    .description("units' readiness tags, or what is missing until they have one")
    .argument('<unit...>', 'unit numbers, like 0412', (text: string, before: number[] | undefined) => [...(before ?? []), unitNumber(text)])
    .option(...PDF_OPTION)
    .option(...PRINT_OPTION)
    .option(...PRINTER_OPTION)
    .addOption(new Option('--format <format>', 'a6 card, 4x6 in label, or four on a sheet: a4, letter').choices(TAG_FORMATS).default('a6'))
    .option(...JSON_OPTION)
    .action((numbers: number[], options: Omit<TagOptions, 'numbers'>) =>
      does(async () => (await import('../commands/tag.js')).runTag)({ ...options, numbers }),
    );
  program
    .command('label')
    .description('a stock label to find the machine by, or a price label to sell it by')
    .argument('<unit>', 'unit number, like 0412', unitNumber)
    .addOption(new Option('--kind <kind>', 'which label').choices(['stock', 'price']).default('stock'))
    .option('--price <money>', 'on a price label, like 129.00; nothing of it is stored')
    .option('--grade <grade>', 'on a price label, like B')
    .addOption(new Option('--format <format>', 'width x height in mm, as rolls are sold').choices(LABEL_FORMATS).default(USUAL_LABEL))
    .option('--size <size>', 'any other width x height in mm, like 70x40')
    .addOption(
      new Option('--code <code>', "on a stock label: qr opens the unit's page, bars is its number").choices(['qr', 'bars']).default('qr'),
    )
    .option(...PDF_OPTION)
    .option(...PRINT_OPTION)
    .option(...PRINTER_OPTION)
    .option(...JSON_OPTION)
    .action((number: number, options: Omit<LabelOptions, 'number'>) =>
      does(async () => (await import('../commands/label.js')).runLabel)({ ...options, number }),
    );
}
