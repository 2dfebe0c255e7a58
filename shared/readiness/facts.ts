import type { UnitEvent, UnitEventOf } from '../history/events.js';
import { settleReading } from '../history/settle-reading.js';
import { checkOf } from '../script/energised.js';
import type { Check, Sheet } from '../sheet/schema.js';

/** What the safety gates and the readiness rules are asked with: facts in, verdicts with reasons out. */
export interface UnitFacts {
  unit: { number: number; protectionClass: 'I' | 'II' | 'III'; licensedOnly: boolean };
  /** The service sheet of the unit's control family; undefined when the shop has none. */
  sheet: Sheet | undefined;
  /** Everything that happened to the unit, oldest first. */
  events: readonly UnitEvent[];
  shop: { demo: boolean; fourEyes: boolean };
}

/** Whether an event opens the machine: a repair, or a part taken out for another unit. What was measured before no longer counts. */
export const isMend = (event: UnitEvent): boolean => event.kind === 'repair' || event.kind === 'part removed';

/**
 * The events that count, readings judged by the sheet as it stands now.
 *
 * Gate 6: simulated results never count outside the demo shop. A capture, and a calibration run watched in one, counts only if its header
 * does not name another unit and was written after everything up to the last repair; one taken from a file must name this unit.
 * A reading in another unit of measurement than the sheet now asks for says nothing about its limits and is left out.
 */
export function countingEvents({ unit, sheet, events, shop }: UnitFacts): UnitEvent[] {
  let latest = 0;
  let openedAt = 0;
  return events.flatMap((event) => {
    latest = Math.max(latest, Date.parse(event.at));
    if (isMend(event) || event.kind === 'returned') openedAt = latest;
    if (event.simulated && !shop.demo) return [];
    if (event.kind === 'reading') return judgedNow(event, sheet);
    const header = event.kind === 'capture' ? event.capture : event.kind === 'calibration' ? event.calibration : undefined;
    if (!header) return [event];
    const named = header.headerUnit === undefined ? undefined : Number(header.headerUnit);
    const fromFile = event.kind === 'capture' && event.capture.fromFile;
    if (named === undefined ? fromFile : named !== unit.number) return [];
    return header.capturedAt === undefined || Date.parse(header.capturedAt) > openedAt ? [event] : [];
  });
}

/** The limits may be tighter than on the day it was taken; a check that the sheet no longer has keeps its old verdict, and no rule asks for it. */
function judgedNow(event: UnitEventOf<'reading'>, sheet: Sheet | undefined): UnitEvent[] {
  const check = sheet && checkOf(sheet, event.reading.checkId);
  if (!sheet || check?.kind !== 'measure') return [event];
  return check.unit === event.reading.judgement.unit ? [{ ...event, reading: settleReading(event.reading, sheet) }] : [];
}

/** The events since the unit was opened: since the last intake or return, that event included. */
export function sinceOpened(events: readonly UnitEvent[]): UnitEvent[] {
  return events.slice(
    Math.max(
      0,
      events.findLastIndex((event) => event.kind === 'intake' || event.kind === 'returned'),
    ),
  );
}

/** The events after the last repair, or since intake or return where nothing was mended since. */
export function sinceRepair(events: readonly UnitEvent[]): UnitEvent[] {
  return events.slice(events.findLastIndex((event) => event.kind === 'intake' || event.kind === 'returned' || isMend(event)) + 1);
}

/** The sheet's checks that apply to a machine of this protection class. */
export function checksFor({ unit, sheet }: Pick<UnitFacts, 'unit' | 'sheet'>): Check[] {
  return (sheet?.checks ?? []).filter((check) => check.classes?.includes(unit.protectionClass) ?? true);
}
