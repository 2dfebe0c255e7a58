import { v7 as newId } from 'uuid';
import type { PersonRef, RepairBody } from '../../shared/history/events.js';
import type { Db } from '../db.js';
import { InvalidError } from '../errors.js';
import { placeOf, recordEvents, openUnitHistory, unitNumberText, withdrawTag, type UnitHistory } from './unit-history.js';

/** The unit that a used part came from; undefined for a new part, or none. */
export const donorOf = ({ partSource }: RepairBody): number | undefined => (partSource.kind === 'used' ? partSource.fromUnit : undefined);

/** PostgreSQL's integer ends here; no shop has so many units. */
const NUMBER_AT_MOST = 2_147_483_647;

/** The donors of these repairs that may be on the books, each once. */
export const donorsOf = (repairs: readonly RepairBody[]): number[] =>
  [...new Set(repairs.flatMap((repair) => donorOf(repair) ?? []))].filter((number) => number <= NUMBER_AT_MOST);

/**
 * A part taken out of a unit: it stands in that unit's history, and a standing tag there ends (gate 8: a part removed).
 * A simulated repair takes nothing out of a real machine, so outside the demo shop it ends nothing.
 * `openUnitHistory` has locked the donor already.
 */
export async function takePartFrom(
  db: Db,
  history: UnitHistory & { besideUnits: Map<number, unknown> },
  repair: RepairBody,
  about: { by: PersonRef; simulated: boolean; now: Date; pointer: string },
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
  const { by, simulated, now } = about;
  const text = `${repair.part} taken out, for unit ${unitNumberText(history.unit.number)}`;
  await recordEvents(db, donor, [{ id: newId(), at: now.toISOString(), by, simulated, kind: 'note', text }], placeOf(donor, now, now), now);
  if (donor.tag && !donor.tag.withdrawn && (donor.shop.demo || !simulated)) {
    const after = await openUnitHistory(db, number);
    if (after.tag)
      await withdrawTag(db, { ...after, tag: after.tag }, { by, reason: `a part was removed: ${repair.part}`, now, simulated });
  }
}
