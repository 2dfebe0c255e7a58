import { BadInputError } from '../../shared/errors.js';
import { repairBodySchema, type RepairBody } from '../../shared/history/events.js';
import { terminalTechnician } from '../bench/terminal-technician.js';
import { unitPage } from '../bench/unit-on-bench.js';
import type { Context } from '../context.js';
import { ServerUnreachableError, UsageError } from '../errors.js';
import { EXIT } from '../exit-codes.js';
import { keepAndSend } from '../journal/deliver.js';
import { parseMoney } from '../money.js';
import { parsePartSource } from '../part-source.js';
import { deliveryWords } from '../render/delivery-words.js';
import { printJson } from '../render/json.js';
import { repairText } from '../render/repair-text.js';
import { unitLabel } from '../render/words.js';
import { personOf, whoIsHere } from '../session.js';

export interface RepairOptions {
  number: number;
  part?: string;
  source?: string;
  minutes?: number;
  cost?: string;
  note?: string;
  json?: boolean;
}

/** Puts down what was mended. Whatever was measured before it no longer counts where the rules say so. */
export async function runRepair(options: RepairOptions, context: Context): Promise<number> {
  const me = await whoIsHere(context);
  const repair = await repairFrom(options, context, me.shop.currency);
  // A number that nobody has is found out now, not when it is sent; where the network is away the bench may not know the unit.
  await unitPage(context, options.number).catch((error: unknown) => {
    if (!(error instanceof ServerUnreachableError)) throw error;
  });
  const id = context.newId();
  const at = context.now().toISOString();
  const delivery = await keepAndSend(context, {
    route: 'recordRepair',
    id,
    madeAt: at,
    server: context.server,
    by: personOf(me.user),
    what: `repair of ${unitLabel(options.number)} (${repair.part})`,
    params: { number: options.number },
    body: { id, at, simulated: false, repair },
  });
  if (delivery.state !== 'sent') context.stderr.say(deliveryWords(delivery));
  if (options.json === true) printJson(context, { id, unit: options.number, repair, sent: delivery.state === 'sent' });
  else context.stdout.write(`${unitLabel(options.number)} mended: ${repairText(repair)}. The dead tests come first again now.\n`);
  return delivery.state === 'sent' ? EXIT.good : EXIT.server;
}

async function repairFrom(options: RepairOptions, context: Context, currency: string): Promise<RepairBody> {
  const { part, source, minutes, cost = '0', note } = options;
  if (part === undefined || source === undefined || minutes === undefined) {
    const missing = [
      part === undefined ? '--part' : '',
      source === undefined ? '--source' : '',
      minutes === undefined ? '--minutes' : '',
    ].filter(Boolean);
    if (!context.interactive)
      throw new UsageError(`A repair needs ${missing.join(', ')}. Nobody is at a terminal to answer: give them as options`);
    const mended = await terminalTechnician(context, currency).mended('repair', { part, optional: false, parts: [] });
    if (!mended) throw new BadInputError('nothing was mended');
    return mended;
  }
  const parsed = repairBodySchema.safeParse({
    part,
    partSource: parsePartSource(source),
    minutes,
    costMinor: parseMoney(cost, currency, '--cost'),
    ...(note === undefined ? {} : { note }),
  });
  if (!parsed.success) throw new UsageError(parsed.error.issues.map(({ path, message }) => `${path.join('.')}: ${message}`).join('; '));
  return parsed.data;
}
