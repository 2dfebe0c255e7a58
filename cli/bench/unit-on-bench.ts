import { z } from 'zod';
import { unitPageSchema, type UnitPage } from '../../shared/api/units.js';
import { sheetPageSchema } from '../../shared/api/sheets.js';
import { BadInputError } from '../../shared/errors.js';
import type { PersonRef, UnitEvent } from '../../shared/history/events.js';
import type { UnitFacts } from '../../shared/readiness/facts.js';
import type { Sheet } from '../../shared/sheet/schema.js';
import type { Context } from '../context.js';
import { ServerUnreachableError } from '../errors.js';
import { readIfThere, writeWhole } from '../home.js';
import { parseJson, personOf, whoIsHere, type Me } from '../session.js';
import { unitLabel, unitNumberText } from '../render/words.js';
import { eventsOfWaiting } from './waiting-events.js';
import { withRun } from './with-run.js';

/** Everything a bench needs to know of a unit to work on it, network or not. */
export interface UnitOnBench {
  page: UnitPage;
  sheet: Sheet;
  me: Me;
  by: PersonRef;
  /** From the copies of last time: the network is away. */
  offline: boolean;
  /** What happened to the unit, with what still waits on this bench. */
  facts: UnitFacts;
}

/** From the server, kept for working offline; from what was kept where the network is away. */
async function fetchOrKept<T>(file: string, schema: z.ZodType<T>, fetched: () => Promise<T>): Promise<{ value: T; offline: boolean }> {
  try {
    const value = await fetched();
    writeWhole(file, JSON.stringify(value));
    return { value, offline: false };
  } catch (error) {
    if (!(error instanceof ServerUnreachableError)) throw error;
    const kept = schema.safeParse(parseJson(readIfThere(file) ?? ''));
    if (!kept.success) throw error;
    return { value: kept.data, offline: true };
  }
}

export async function unitPage(context: Context, number: number): Promise<{ value: UnitPage; offline: boolean }> {
  const file = context.home.path('cache', 'units', `${unitNumberText(number)}.json`);
  return fetchOrKept(file, unitPageSchema, async () => (await context.api()).call('getUnit', { params: { number } }));
}

/** The newest edition of a family's sheet. */
export async function sheetOf(context: Context, family: string): Promise<{ value: Sheet; offline: boolean }> {
  const file = context.home.path('cache', 'sheets', `${encodeURIComponent(family)}.json`);
  const { value, offline } = await fetchOrKept(file, sheetPageSchema, async () =>
    (await context.api()).call('getSheet', { params: { family } }),
  );
  return { value: value.sheet, offline };
}

/** The unit with its sheet and its history. Refuses (BadInputError) a unit without a control family, unless a sheet is handed in. `besidesRun`: an open run whose steps are not counted in, for it is gone on with. */
export async function unitOnBench(context: Context, number: number, sheetGiven?: Sheet, besidesRun?: string): Promise<UnitOnBench> {
  const me = await whoIsHere(context);
  const page = await unitPage(context, number);
  const { unit } = page.value;
  if (unit.family === undefined && !sheetGiven)
    throw new BadInputError(
      `${unitLabel(number)} has no control family, so there is no service sheet to go by: a lead gives it one, or hand in --sheet`,
    );
  const sheet = sheetGiven ? { value: sheetGiven, offline: false } : await sheetOf(context, unit.family ?? '');
  const offline = me.offline || page.offline || sheet.offline;
  if (offline) context.stderr.say(`The server at ${context.server} can't be reached: working with what this bench knows from last time.`);
  const by = personOf(me.user);
  const waiting = eventsOfWaiting(context, number, sheet.value, besidesRun);
  return { page: page.value, sheet: sheet.value, me, by, offline, facts: factsOf(page.value, sheet.value, me, waiting) };
}

export function factsOf(page: UnitPage, sheet: Sheet, me: Me, waiting: readonly UnitEvent[]): UnitFacts {
  const { number, plate, licensedOnly } = page.unit;
  return {
    unit: { number, protectionClass: plate.protectionClass, licensedOnly },
    sheet,
    events: withRun(page.events, waiting),
    shop: { demo: me.shop.demo, fourEyes: me.shop.fourEyes },
  };
}
