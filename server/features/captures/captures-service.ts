import { v7 as newId } from 'uuid';
import type { z } from 'zod';
import type { newCaptureSchema } from '../../../shared/api/captures.js';
import type { User } from '../../../shared/api/sessions.js';
import type { DecodeAnswer } from '../../../shared/decode/answer.js';
import type { UnitEvent } from '../../../shared/history/events.js';
import { captureBody } from '../../../shared/history/settle-run.js';
import { readCapture } from '../../../shared/lamps/read-capture.js';
import { energisingGate } from '../../../shared/readiness/gates.js';
import { unitNumberText } from '../../../shared/unit-number.js';
import type { Db } from '../../db.js';
import { ConflictError } from '../../errors.js';
import { refuseWhereShut } from '../../history/ask-gate.js';
import { atPointer } from '../../history/at-pointer.js';
import { insertCapture } from '../../history/capture-store.js';
import { happenedAt, refuseFuture } from '../../history/happened-at.js';
import { sheetOf } from '../../history/sheet-of.js';
import { factsOf, openUnitHistory, placeOf, recordEvents, refOf } from '../../history/unit-history.js';
import { refuseWhatIsNoText } from '../../request-faults.js';

type NewCapture = z.output<typeof newCaptureSchema>;

/**
 * Stores a capture as the server reads it. A live one had the machine on: the gate is asked. One from a file was taken elsewhere
 * and earlier: it is kept whatever the gate says, and the rules decide whether it counts.
 */
export async function recordCapture(
  db: Db,
  unitNumber: number,
  request: NewCapture,
  person: User,
  now: Date,
): Promise<{ id: string; answer: DecodeAnswer }> {
  const at = happenedAt(request.at, now, '/at');
  const capture = atPointer('/file', () => readCapture(request.file));
  refuseFuture(capture.header.capturedAt, now, '/file');
  const history = await openUnitHistory(db, unitNumber);
  const { unit } = history;
  const sheet = sheetOf(history, 'nothing can decode its lamps');
  const simulated = capture.header.source === 'simulated';
  const place = placeOf(history, at, now);
  if (!request.fromFile) {
    const gate = energisingGate(factsOf(history, place.before), { rigSimulated: simulated });
    refuseWhereShut(gate, `The lamps of unit ${unitNumberText(unit.number)} may not be captured yet`);
  }
  const body = atPointer('/file', () => captureBody(capture, sheet, { captureId: request.id, fromFile: request.fromFile }));
  refuseWhatIsNoText(body, '/file');
  const by = refOf(person);
  const stored = await insertCapture(db, {
    id: request.id,
    unitId: unit.id,
    by,
    at: at.toISOString(),
    simulated,
    body,
    file: request.file,
    recordedAt: now,
  });
  if (!stored)
    throw new ConflictError(
      'A capture with this id is stored already.',
      'Send the capture again under the key it was first sent with, or give it a new id.',
    );
  const event: UnitEvent = { id: newId(), at: at.toISOString(), by, simulated, kind: 'capture', capture: body };
  await recordEvents(db, history, [{ event, orderedAt: place.orderedAt }], now);
  return { id: request.id, answer: body.answer };
}
