import type { UnitEvent } from '../history/events.js';
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

/**
 * The events that count: simulated results never do outside the demo shop, and a capture from a file only if its
 * header names this unit and it was recorded after the last repair (gate 6).
 */
export function countingEvents({ unit, events, shop }: UnitFacts): UnitEvent[] {
  let lastRepairAt = '';
  return events.filter((event) => {
    if (event.kind === 'repair' || event.kind === 'returned') lastRepairAt = event.at;
    if (event.simulated && !shop.demo) return false;
    if (event.kind !== 'capture' || !event.capture.fromFile) return true;
    return (
      Number(event.capture.headerUnit) === unit.number &&
      Date.parse(event.capture.capturedAt) > (lastRepairAt ? Date.parse(lastRepairAt) : 0)
    );
  });
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
  return events.slice(events.findLastIndex((event) => event.kind === 'intake' || event.kind === 'returned' || event.kind === 'repair') + 1);
}

/** The sheet's checks that apply to a machine of this protection class. */
export function checksFor({ unit, sheet }: Pick<UnitFacts, 'unit' | 'sheet'>): Check[] {
  return (sheet?.checks ?? []).filter((check) => check.classes?.includes(unit.protectionClass) ?? true);
}
