import { readSheet } from '../../../shared/sheet/read-sheet.js';
import { textOf } from '../../bench/read-script.js';
import type { Context } from '../../context.js';
import { EXIT } from '../../exit-codes.js';
import { printJson } from '../../render/json.js';

/** Adds a sheet to the shop, or its next edition. A sheet that doesn't hold together is refused here already. */
export async function runSheetAdd({ file, json }: { file: string; json?: boolean }, context: Context): Promise<number> {
  const text = textOf(file, 'service sheet');
  readSheet(text, file);
  const row = await (await context.api()).call('addSheet', { body: { text } });
  if (json === true) printJson(context, row);
  else context.stdout.write(`${row.title ?? row.family}, edition ${row.edition}, is in the shop.\n`);
  return EXIT.good;
}
