import { v7 as newId } from 'uuid';
import type { z } from 'zod';
import type { newInspectionSchema, newReadingSchema, newRepairSchema } from '../../../shared/api/readings.js';
import type { User } from '../../../shared/api/sessions.js';
import type { UnitEvent } from '../../../shared/history/events.js';
import { settleInspection, settleReading } from '../../../shared/history/settle-reading.js';
import { energisingGate, type EnergisingQuestion } from '../../../shared/readiness/gates.js';
import { unitNumberText } from '../../../shared/unit-number.js';
import type { Db } from '../../db.js';
import { audit } from '../../history/audit.js';
import { refuseWhereShut } from '../../history/ask-gate.js';
import { atPointer } from '../../history/at-pointer.js';
import { donorsOf, takePartFrom } from '../../history/donor.js';
import { happenedAt } from '../../history/happened-at.js';
import { sheetOf } from '../../history/sheet-of.js';
import {
  arrivingNow,
  factsOf,
  openUnitHistory,
  placeOf,
  recordEvents,
  refOf,
  type Place,
  type UnitHistory,
} from '../../history/unit-history.js';

interface Recorded {
  id: string;
  at: string;
  simulated: boolean;
}

const baseOf = (request: Recorded, person: User, at: Date) => ({
  // As PostgreSQL writes it.
  id: request.id.toLowerCase(),
  at: at.toISOString(),
  by: refOf(person),
  simulated: request.simulated,
});

function askGate(history: UnitHistory, place: Place, question: EnergisingQuestion, title: string): void {
  refuseWhereShut(
    energisingGate(factsOf(history, place.before), question),
    `${title} on unit ${unitNumberText(history.unit.number)} may not begin`,
  );
}

/** A reading, judged by the sheet's limits whatever it was judged by before. Dead tests have an order; an energised one needs them all. */
export async function recordReading(
  db: Db,
  unitNumber: number,
  request: z.output<typeof newReadingSchema>,
  person: User,
  now: Date,
): Promise<UnitEvent> {
  const at = happenedAt(request.at, now, '/at');
  const history = await openUnitHistory(db, unitNumber);
  const sheet = sheetOf(history, 'there are no limits to judge a reading by');
  const reading = atPointer('/reading', () => settleReading(request.reading, sheet));
  const place = placeOf(history, at, now);
  if (reading.deadTest !== undefined) askGate(history, place, { rigSimulated: request.simulated, before: reading.deadTest }, reading.title);
  else if (reading.condition === 'energised') askGate(history, place, { rigSimulated: request.simulated }, reading.title);
  const event: UnitEvent = { ...baseOf(request, person, at), kind: 'reading', reading };
  await recordEvents(db, history, [{ event, orderedAt: place.orderedAt }], now);
  return event;
}

/** Something looked at. A unit without a sheet can be looked at too. */
export async function recordInspection(
  db: Db,
  unitNumber: number,
  request: z.output<typeof newInspectionSchema>,
  person: User,
  now: Date,
): Promise<UnitEvent> {
  const at = happenedAt(request.at, now, '/at');
  const history = await openUnitHistory(db, unitNumber);
  const inspection = atPointer('/inspection', () => settleInspection(request.inspection, history.sheet));
  const place = placeOf(history, at, now);
  if (inspection.deadTest !== undefined)
    askGate(history, place, { rigSimulated: request.simulated, before: inspection.deadTest }, inspection.title);
  const event: UnitEvent = { ...baseOf(request, person, at), kind: 'inspection', inspection };
  await recordEvents(db, history, [{ event, orderedAt: place.orderedAt }], now);
  return event;
}

/** A repair: from now on only what is measured after it counts. */
export async function recordRepair(
  db: Db,
  unitNumber: number,
  request: z.output<typeof newRepairSchema>,
  person: User,
  now: Date,
): Promise<UnitEvent> {
  const at = happenedAt(request.at, now, '/at');
  const history = await openUnitHistory(db, unitNumber, donorsOf([request.repair]));
  const base = baseOf(request, person, at);
  const event: UnitEvent = { ...base, kind: 'repair', repair: request.repair };
  await takePartFrom(db, history, request.repair, { ...base, now, pointer: '/repair/partSource/fromUnit' });
  await recordEvents(db, history, [{ event, orderedAt: placeOf(history, at, now).orderedAt }], now);
  return event;
}

/** A lead's word, with a reason, that the machine may be energised in spite of what is missing. */
export async function recordOverride(db: Db, unitNumber: number, reason: string, person: User, now: Date): Promise<UnitEvent> {
  const history = await openUnitHistory(db, unitNumber);
  const event: UnitEvent = {
    id: newId(),
    at: now.toISOString(),
    by: refOf(person),
    simulated: false,
    kind: 'override',
    gate: 'dead tests',
    reason,
  };
  await recordEvents(db, history, [{ event, orderedAt: arrivingNow(history, now) }], now);
  const number = unitNumberText(unitNumber);
  await audit(db, {
    who: refOf(person),
    what: 'override.recorded',
    subject: { kind: 'unit', id: number, name: `unit ${number}` },
    after: { gate: 'dead tests', reason },
    at: now,
  });
  return event;
}
