import { v7 as newId } from 'uuid';
import type { Shop, User } from '../../shared/api/sessions.js';
import type { Unit } from '../../shared/api/units.js';
import type { PersonRef, UnitEvent } from '../../shared/history/events.js';
import { countingEvents, isMend, type UnitFacts } from '../../shared/readiness/facts.js';
import { stageOf } from '../../shared/readiness/stage.js';
import { whatWithdraws } from '../../shared/readiness/tag-standing.js';
import type { Sheet } from '../../shared/sheet/schema.js';
import { unitNumberText } from '../../shared/unit-number.js';
import type { Db } from '../db.js';
import { NotFoundError } from '../errors.js';
import { audit } from './audit.js';
import { historyOf, insertEvents, type PlacedEvent } from './event-store.js';
import { newestSheet } from './sheet-store.js';
import { readShop } from './shop-store.js';
import { markWithdrawn, newestTag, type StoredTag } from './tag-store.js';
import { findUnit, lockUnits, setStage } from './unit-store.js';

export const refOf = ({ id, name, role }: User): PersonRef => ({ id, name, role });

/** A unit with all that is decided by: its history, its sheet, the shop, its tag. */
export interface UnitHistory {
  unit: Unit;
  sheet: Sheet | undefined;
  shop: Shop;
  placed: PlacedEvent[];
  tag: StoredTag | undefined;
}

export const factsOf = ({ unit, sheet, shop }: Pick<UnitHistory, 'unit' | 'sheet' | 'shop'>, events: readonly UnitEvent[]): UnitFacts => ({
  unit: { number: unit.number, protectionClass: unit.plate.protectionClass, licensedOnly: unit.licensedOnly },
  sheet,
  events,
  shop: { demo: shop.demo, fourEyes: shop.fourEyes },
});

export const eventsOf = (history: Pick<UnitHistory, 'placed'>): UnitEvent[] => history.placed.map(({ event }) => event);

async function loadHistory(db: Db, unit: Unit): Promise<UnitHistory> {
  return {
    unit,
    sheet: await newestSheet(db, unit.family),
    shop: await readShop(db),
    placed: await historyOf(db, unit.id),
    tag: await newestTag(db, unit.id),
  };
}

const noSuchUnit = (number: number): NotFoundError => new NotFoundError(`There is no unit ${unitNumberText(number)}.`);

export async function readUnitHistory(db: Db, number: number): Promise<UnitHistory> {
  const unit = await findUnit(db, number);
  if (!unit) throw noSuchUnit(number);
  return loadHistory(db, unit);
}

/** For a write: nobody else writes on this unit, nor on those beside it, until the transaction ends. Units beside it may be missing. */
export async function openUnitHistory(
  db: Db,
  number: number,
  beside: readonly number[] = [],
): Promise<UnitHistory & { besideUnits: Map<number, Unit> }> {
  const units = await lockUnits(db, [number, ...beside]);
  const unit = units.get(number);
  if (!unit) throw noSuchUnit(number);
  return { ...(await loadHistory(db, unit)), besideUnits: units };
}

/** Where something that happened at `at` stands in the history, and what stands before it. */
export interface Place {
  orderedAt: Date;
  before: UnitEvent[];
}

/** Last; never before what stands already, should the server's clock have been set back. */
export const arrivingNow = ({ placed }: Pick<UnitHistory, 'placed'>, now: Date): Date =>
  new Date(Math.max(now.getTime(), placed.at(-1)?.orderedAt.getTime() ?? 0));

/**
 * A history is in the order of arrival, with one exception: what a bench measured before the last repair and sent only afterwards
 * stands before that repair, for it says nothing about the mended machine; so it is with a sale and a return. A repair with a clock that runs ahead counts from when
 * it was written down.
 */
export function placeOf(history: UnitHistory, at: Date, now: Date): Place {
  const late = history.placed.find(
    ({ event, recordedAt }) => opensAnew(event) && at.getTime() < Math.min(Date.parse(event.at), recordedAt.getTime()),
  );
  const orderedAt = late ? new Date(late.orderedAt.getTime() - 1) : arrivingNow(history, now);
  return { orderedAt, before: history.placed.filter((one) => one.orderedAt <= orderedAt).map(({ event }) => event) };
}

/** A sale opens nothing, but what was measured before it must not make a sold machine one that is being tested. */
const opensAnew = (event: UnitEvent): boolean => isMend(event) || event.kind === 'returned' || event.kind === 'sold';

/**
 * Each event of a bench log by its own time, for the machine may have been mended while the run went on: what was measured before that
 * stands before it, what was measured after it counts. The log's own order stays, should the bench's clock have been set back meanwhile.
 */
export function placeEach(history: UnitHistory, events: readonly UnitEvent[], now: Date): { event: UnitEvent; orderedAt: Date }[] {
  let latest = 0;
  return events.map((event) => {
    latest = Math.max(latest, Date.parse(event.at));
    return { event, orderedAt: placeOf(history, new Date(latest), now).orderedAt };
  });
}

/**
 * Writes events into a unit's history, and everything that follows from them in the same transaction: its stage, and the end of
 * a standing tag that they contradict.
 */
export async function recordEvents(
  db: Db,
  history: UnitHistory,
  events: readonly { event: UnitEvent; orderedAt: Date }[],
  now: Date,
): Promise<void> {
  await insertEvents(db, history.unit.id, events, now);
  const placed = await historyOf(db, history.unit.id);
  const facts = factsOf(history, eventsOf({ placed }));
  const tag = await newestTag(db, history.unit.id);
  const broken = tag && !tag.withdrawn ? whatWithdraws(facts, tag.number) : undefined;
  const by = events.at(-1)?.event.by;
  if (tag && broken !== undefined && by) {
    await withdrawTag(db, { ...history, placed, tag }, { by, reason: broken, now });
    return;
  }
  await setStage(db, history.unit.id, stageOf(countingEvents(facts)));
}

/** The tag no longer stands: said in its row and in the history. */
export async function withdrawTag(
  db: Db,
  history: UnitHistory & { tag: StoredTag },
  why: { by: PersonRef; reason: string; now: Date },
): Promise<void> {
  const { unit, tag } = history;
  const event: UnitEvent = {
    id: newId(),
    at: why.now.toISOString(),
    by: why.by,
    simulated: false,
    kind: 'tag withdrawn',
    tag: tag.number,
    reason: why.reason,
  };
  await markWithdrawn(db, tag.number, why.now, why.reason);
  await audit(db, {
    who: why.by,
    what: 'tag.withdrawn',
    subject: { kind: 'tag', id: tag.number, name: `tag ${tag.number}` },
    before: { standing: 'stands' },
    after: { standing: 'withdrawn', reason: why.reason },
    at: why.now,
  });
  await insertEvents(db, unit.id, [{ event, orderedAt: arrivingNow(history, why.now) }], why.now);
  await setStage(db, unit.id, stageOf(countingEvents(factsOf(history, [...eventsOf(history), event]))));
}
