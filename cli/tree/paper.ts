import type { Command } from 'commander';
import { JSON_OPTION, unitNumber, type Does } from './parts.js';

/** What is printed. */
export function paperCommands(program: Command, does: Does): void {
  program.commandsGroup('Paper:');
  program
    .command('tag')
    .description("a unit's readiness tag, or what is missing until it has one")
    .argument('<unit>', 'unit number, like 0412', unitNumber)
    .option('--pdf <file>', 'write it as an A6 page, for a card or label printer')
    .option(...JSON_OPTION)
    .action((number: number, options: object) => does(async () => (await import('../commands/tag.js')).runTag)({ ...options, number }));
}
