import type { Context } from '../../context.js';
import { EXIT } from '../../exit-codes.js';
import { printJson } from '../../render/json.js';

/** A sheet of the shop as its file: `refettle sheet show heron-h6 > heron-h6.yaml`. */
export async function runSheetShow({ family, json }: { family: string; json?: boolean }, context: Context): Promise<number> {
  const page = await (await context.api()).call('getSheet', { params: { family } });
  if (json === true) printJson(context, page);
  else context.stdout.writeExactly(page.text.endsWith('\n') ? page.text : `${page.text}\n`);
  return EXIT.good;
}
