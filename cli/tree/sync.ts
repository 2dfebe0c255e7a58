import type { Command } from 'commander';
import { JSON_OPTION, type Does } from './parts.js';

/** What waits to be sent. */
export function syncCommands(program: Command, does: Does): void {
  program.commandsGroup('What waits to be sent:');
  program
    .command('sync')
    .description('send what waits on this bench')
    .option('--status', 'only say what waits, since when, why, and who must act')
    .option('--watch', 'keep sending until nothing waits')
    .option('--drop <entry>', 'give up on one that the server refuses, or that never gets through; it stays on the disk')
    .option(...JSON_OPTION)
    .action(does(async () => (await import('../commands/sync.js')).runSync));
}
