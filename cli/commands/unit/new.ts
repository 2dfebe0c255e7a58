import type { z } from 'zod';
import { applianceSchema, newUnitSchema, unitSchema, type NewUnit, type Unit } from '../../../shared/api/units.js';
import type { Context } from '../../context.js';
import { ApiProblemError, NobodyToAskError, UsageError } from '../../errors.js';
import { EXIT } from '../../exit-codes.js';
import { keepAndSend, type Delivery } from '../../journal/deliver.js';
import { putAway } from '../../journal/outbox.js';
import { parseMoney } from '../../money.js';
import { deliveryWords } from '../../render/delivery-words.js';
import { printJson } from '../../render/json.js';
import { unitLabel, unitNumberText } from '../../render/words.js';
import { personOf, whoIsHere, type Me } from '../../session.js';

export interface UnitNewOptions {
  appliance?: string;
  maker?: string;
  model?: string;
  serial?: string;
  plateUnreadable?: boolean;
  class?: string;
  volts?: number;
  hertz?: number;
  watts?: number;
  amperes?: number;
  mass?: number;
  family?: string;
  complaint?: string;
  source?: string;
  cost?: string;
  sameSerial?: string;
  json?: boolean;
}

const SAME_SERIAL_REASONS = newUnitSchema.shape.sameSerialReason.unwrap().options;

/** Takes in a unit. What is missing is asked for at a terminal. */
export async function runUnitNew(options: UnitNewOptions, context: Context): Promise<number> {
  const me = await whoIsHere(context);
  const body = await newUnitFrom(options, context, me);
  let delivery = await take(context, me, body);
  if (delivery.state === 'refused' && delivery.error?.kind === 'same-serial') {
    // Nothing was taken in yet; the same machine again needs a reason, and then a message of its own.
    putAway(context.home, delivery.entry.id, 'dropped');
    const reason = await sameSerialReason(context, delivery.error);
    delivery = await take(context, me, { ...body, sameSerialReason: reason });
  }
  if (delivery.state !== 'sent') {
    context.stderr.say(deliveryWords(delivery));
    return EXIT.server;
  }
  const unit = unitSchema.parse(delivery.answer);
  if (options.json === true) printJson(context, unit);
  else await printTakenIn(context, unit);
  return EXIT.good;
}

function take(context: Context, me: Me, body: NewUnit): Promise<Delivery> {
  const what = `intake of a ${body.plate.maker} ${body.plate.model}`;
  return keepAndSend(context, {
    route: 'takeInUnit',
    id: context.newId(),
    madeAt: context.now().toISOString(),
    server: context.server,
    by: personOf(me.user),
    what,
    body,
  });
}

async function newUnitFrom(options: UnitNewOptions, context: Context, { shop }: Me): Promise<NewUnit> {
  const { prompt, interactive } = context;
  const ask = async (given: string | undefined, message: string, option: string): Promise<string> =>
    given ??
    prompt.text({ message, refuse: (text) => (text === '' ? 'it can’t stay empty' : undefined), instead: `give it with ${option}` });
  const choose = async <T extends string>(
    given: string | undefined,
    message: string,
    option: string,
    choices: readonly T[],
  ): Promise<T> => {
    const value =
      given ??
      (await prompt.choice({
        message,
        choices: choices.map((choice) => ({ value: choice, name: choice })),
        instead: `give it with ${option}`,
      }));
    const known = choices.find((choice) => choice.toLowerCase() === value.toLowerCase());
    if (known === undefined) throw new UsageError(`${option}: '${value}' is none of ${choices.join(', ')}`);
    return known;
  };

  const appliance = await choose(options.appliance, 'Appliance', '--appliance', applianceSchema.options);
  const maker = await ask(options.maker, 'Maker, as the plate has it', '--maker');
  const model = await ask(options.model, 'Model', '--model');
  const serial = await serialFrom(options, context);
  const protectionClass = await choose(options.class, 'Protection class', '--class', ['I', 'II', 'III']);
  const complaint = await ask(options.complaint, 'What is it said to do', '--complaint');
  // What may stay out is asked for only when somebody goes through all of it anyway.
  const family =
    options.family ??
    (interactive && options.complaint === undefined
      ? (await prompt.text({ message: 'Control family (may stay empty)', instead: 'give it with --family' })) || undefined
      : undefined);
  const draft = {
    appliance,
    plate: {
      maker,
      model,
      ...(serial === undefined ? {} : { serial }),
      plateUnreadable: options.plateUnreadable === true,
      protectionClass,
      volts: options.volts,
      hertz: options.hertz,
      watts: options.watts,
      amperes: options.amperes,
      massKg: options.mass,
    },
    family,
    complaint,
    source: options.source,
    costMinor: options.cost === undefined ? 0 : parseMoney(options.cost, shop.currency, '--cost'),
    ...(options.sameSerial === undefined
      ? {}
      : { sameSerialReason: await choose(options.sameSerial, 'Why', '--same-serial', SAME_SERIAL_REASONS) }),
  };
  const parsed = newUnitSchema.safeParse(JSON.parse(JSON.stringify(draft)));
  if (!parsed.success) throw new UsageError(parsed.error.issues.map(({ path, message }) => `${path.join('.')}: ${message}`).join('; '));
  return parsed.data;
}

async function serialFrom(options: UnitNewOptions, context: Context): Promise<string | undefined> {
  if (options.plateUnreadable === true) return options.serial;
  if (options.serial !== undefined) return options.serial;
  if (!context.interactive) throw new NobodyToAskError('Which serial number?', 'give it with --serial, or say --plate-unreadable');
  return context.prompt.text({
    message: 'Serial number',
    refuse: (text) => (text === '' ? 'type it, or start again with --plate-unreadable' : undefined),
    instead: 'give it with --serial',
  });
}

/** The serial is on the books already: warned, listed, and taken in only with a reason. */
async function sameSerialReason(
  context: Context,
  problem: ApiProblemError,
): Promise<z.infer<typeof newUnitSchema>['sameSerialReason'] & string> {
  context.stderr.say(`${problem.message}`);
  const answer = await context.prompt.choice({
    message: 'Why is it taken in again',
    choices: SAME_SERIAL_REASONS.map((reason) => ({ value: reason, name: reason })),
    instead: `give a reason with --same-serial (${SAME_SERIAL_REASONS.join(', ')})`,
  });
  return newUnitSchema.shape.sameSerialReason.unwrap().parse(answer);
}

async function printTakenIn({ stdout, stderr }: Context, unit: Unit): Promise<void> {
  const { ink } = await stdout.style();
  stdout.write(`${ink.bold(unitLabel(unit.number))}  ${unit.plate.maker} ${unit.plate.model}, ${unit.appliance}, taken in.\n`);
  if (unit.sameSerial) stdout.write(`The same serial as ${unit.sameSerial.units.map(unitLabel).join(', ')}: ${unit.sameSerial.reason}.\n`);
  if (unit.licensedOnly) stderr.say('Licensed person only: gas, sealed refrigerant or a microwave oven. No script runs on it.');
  if (unit.family === undefined)
    stderr.say(
      `It has no control family yet, and without a service sheet its lamps can’t be decoded. When it is known: refettle unit family ${unitNumberText(unit.number)} FAMILY`,
    );
  stderr.say(`Its stock label: refettle label ${unitNumberText(unit.number)} --print`);
}
