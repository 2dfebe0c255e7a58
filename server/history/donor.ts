import { v7 as newId } from 'uuid';
import type { PersonRef, RepairBody, UnitEvent } from '../../shared/history/events.js';
import { unitNumberText } from '../../shared/unit-number.js';
import type { Db } from '../db.js';
import { InvalidError } from '../errors.js';
import { arrivingNow, openUnitHistory, recordEvents, type UnitHistory } from './unit-history.js';

/** The unit that a used part came from; undefined for a new part, or none. */
const donorOf = ({ partSource }: RepairBody): number | undefined => (partSource.kind === 'used' ? partSource.fromUnit : undefined);

/** PostgreSQL's integer ends here; no shop has so many units. */
const NUMBER_AT_MOST = 2_147_483_647;

/** The donors of these repairs that may be on the books, each once. */
export const donorsOf = (repairs: readonly RepairBody[]): number[] =>
  [...new Set(repairs.flatMap((repair) => donorOf(repair) ?? []))].filter((number) => number <= NUMBER_AT_MOST);

/**
 * A part taken out of a unit: it stands in that unit's history, opens it like a repair, and ends a standing tag there (gate 8).
 * It stands last whatever clock it comes with: a part that is gone is missing from what was proved before anybody said so.
 * `openUnitHistory` has locked the donor already.
 */
export async function takePartFrom(
  db: Db,
  history: UnitHistory & { besideUnits: Map<number, unknown> },
  repair: RepairBody,
  about: { at: string; by: PersonRef; simulated: boolean; now: Date; pointer: string },
): Promise<void> {
  const number = donorOf(repair);
  if (number === undefined) return;
  if (number === history.unit.number)
    throw new InvalidError([{ pointer: about.pointer, reason: 'a part can’t come from the unit that it goes into' }]);
  if (!history.besideUnits.has(number))
    throw new InvalidError([
      { pointer: about.pointer, reason: `there is no unit ${unitNumberText(number)} that the part could come from` },
    ]);
  const donor = await openUnitHistory(db, number);
  const { at, by, simulated, now } = about;
  const event: UnitEvent = { id: newId(), at, by, simulated, kind: 'part removed', part: repair.part, toUnit: history.unit.number };
  await recordEvents(db, donor, [{ event, orderedAt: arrivingNow(donor, now) }], now);
}
