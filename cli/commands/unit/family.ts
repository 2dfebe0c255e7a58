import { signOnIfShared } from '../../bench/sign-on.js';
import type { Context } from '../../context.js';
import { EXIT } from '../../exit-codes.js';
import { printJson } from '../../render/json.js';
import { unitLabel } from '../../render/words.js';

/** Gives a unit that came in without one its control family. Only with the server: it knows which sheets there are. */
export async function runUnitFamily(
  { number, family, json }: { number: number; family: string; json?: boolean },
  context: Context,
): Promise<number> {
  await signOnIfShared(context);
  const api = await context.api();
  const unit = await api.call('giveFamily', { params: { number }, body: { family }, idempotencyKey: context.newId() });
  if (json === true) printJson(context, unit);
  else context.stdout.write(`${unitLabel(number)} goes by the sheet of ${family} from now on.\n`);
  return EXIT.good;
}
