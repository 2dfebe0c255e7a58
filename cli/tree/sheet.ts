import type { Command } from 'commander';
import { JSON_OPTION, type Does } from './parts.js';

/** Service sheets. */
export function sheetCommands(program: Command, does: Does): void {
  program.commandsGroup('Service sheets:');
  const sheet = program.command('sheet').description('service sheets: what the shop knows of a control family');
  sheet
    .command('check')
    .description('whether a service sheet, or a bench script, holds together; needs no server')
    .argument('<file>', 'YAML or JSON')
    .option('--script <file>', 'check this bench script against the sheet too')
    .option(...JSON_OPTION)
    .action((file: string, options: { script?: string; json?: boolean }) =>
      does(async () => (await import('../commands/sheet/check.js')).runSheetCheck)({ ...options, file }),
    );
  sheet
    .command('add')
    .description('add a sheet to the shop, or its next edition (a lead)')
    .argument('<file>', 'YAML or JSON')
    .option(...JSON_OPTION)
    .action((file: string, options: { json?: boolean }) =>
      does(async () => (await import('../commands/sheet/add.js')).runSheetAdd)({ ...options, file }),
    );
  sheet
    .command('show')
    .description('a sheet of the shop, as its file')
    .argument('<family>', 'control family, like heron-h6')
    .option(...JSON_OPTION)
    .action((family: string, options: { json?: boolean }) =>
      does(async () => (await import('../commands/sheet/show.js')).runSheetShow)({ ...options, family }),
    );
}
