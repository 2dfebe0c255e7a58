import { v7 as newId } from 'uuid';
import type { z } from 'zod';
import type { User } from '../../../shared/api/sessions.js';
import { LICENSED_ONLY, type newUnitSchema, type Unit } from '../../../shared/api/units.js';
import { unitNumberText } from '../../../shared/unit-number.js';
import type { Db } from '../../db.js';
import { ConflictError, InvalidError, SameSerialError } from '../../errors.js';
import { insertEvents } from '../../history/event-store.js';
import { newestSheet } from '../../history/sheet-store.js';
import { openUnitHistory, refOf } from '../../history/unit-history.js';
import {
  insertUnit,
  linkSameSerial,
  lockSerial,
  lockUnits,
  nextUnitNumber,
  serialKey,
  setFamily,
  unitsWithSerial,
} from '../../history/unit-store.js';

async function refuseWithoutSheet(db: Db, family: string, remedy: string): Promise<void> {
  if (await newestSheet(db, family)) return;
  throw new InvalidError([{ pointer: '/family', reason: `there is no service sheet for ${family}: ${remedy}` }]);
}

/** A control family for a unit that came in without one. Once given it stays: what was judged by its sheet must go on meaning the same. */
export async function giveFamily(db: Db, unitNumber: number, family: string): Promise<Unit> {
  const { unit } = await openUnitHistory(db, unitNumber);
  if (unit.family !== undefined) throw new ConflictError(`Unit ${unitNumberText(unitNumber)} goes by the sheet of ${unit.family} already.`);
  await refuseWithoutSheet(db, family, 'let a lead add the sheet first');
  await setFamily(db, unit.id, family);
  return { ...unit, family };
}

/** The gate of the shop: plate, complaint, and whether this machine was here before. */
export async function takeIn(db: Db, request: z.output<typeof newUnitSchema>, person: User, now: Date): Promise<Unit> {
  if (request.family !== undefined) await refuseWithoutSheet(db, request.family, 'leave it out, or let a lead add the sheet first');
  const key = request.plate.serial === undefined ? '' : serialKey(request.plate.serial);
  if (key !== '') await lockSerial(db, key);
  const sameSerial = key === '' ? [] : await unitsWithSerial(db, key);
  if (sameSerial.length > 0 && request.sameSerialReason === undefined) throw new SameSerialError(sameSerial);

  // Before anything is written: a repair holds several units too, and whoever waits must hold none that the other one needs.
  await lockUnits(db, sameSerial);

  const { sameSerialReason, ...told } = request;
  const unit: Unit = {
    ...told,
    id: newId(),
    number: await nextUnitNumber(db),
    licensedOnly: LICENSED_ONLY.includes(request.appliance),
    takenInAt: now.toISOString(),
    takenInBy: refOf(person),
    ...(sameSerial.length > 0 && sameSerialReason !== undefined ? { sameSerial: { reason: sameSerialReason, units: sameSerial } } : {}),
  };
  await insertUnit(db, unit, 'intake');
  if (unit.sameSerial) await linkSameSerial(db, sameSerial, unit.number, unit.sameSerial.reason);
  const intake = {
    id: newId(),
    at: unit.takenInAt,
    by: unit.takenInBy,
    simulated: false,
    kind: 'intake' as const,
    complaint: unit.complaint,
  };
  await insertEvents(db, unit.id, [{ event: intake, orderedAt: now }], now);
  return unit;
}
