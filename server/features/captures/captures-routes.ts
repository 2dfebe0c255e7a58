import { lampFace } from '../../../shared/lamps/face.js';
import type { Sheet } from '../../../shared/sheet/schema.js';
import type { CaptureBody } from '../../../shared/history/events.js';
import { NotFoundError } from '../../errors.js';
import { findCapture } from '../../history/capture-store.js';
import { findSheet } from '../../history/sheet-store.js';
import { findUnit } from '../../history/unit-store.js';
import type { RegisterRoute } from '../../route.js';
import { recordCapture } from './captures-service.js';

function facesOf({ answer }: CaptureBody, sheet: Sheet) {
  const candidates = answer.segments.flatMap((segment) => (segment.kind === 'unreadable' ? segment.candidates : []));
  const faces = [...answer.codes, ...candidates].flatMap(({ code }) => {
    const face = lampFace(code, sheet);
    return face ? [[code, face] as const] : [];
  });
  return Object.fromEntries(faces);
}

export function registerCaptureRoutes(route: RegisterRoute): void {
  route('recordCapture', ({ params, body, person, trx, now }) => recordCapture(trx, params.number, body, person, now));

  route('getCapture', async ({ params, trx }) => {
    const capture = await findCapture(trx, params.id);
    // By the edition that decoded it: the page says what was said then.
    const stored = capture && (await findSheet(trx, capture.body.family, capture.body.sheetEdition));
    const unit = capture && (await findUnit(trx, capture.unitNumber));
    if (!capture || !stored || !unit) throw new NotFoundError('There is no such capture.');
    const { id, at, by, runId, simulated, body, file } = capture;
    return {
      id,
      unit: { number: unit.number, maker: unit.plate.maker, model: unit.plate.model },
      at,
      by,
      ...(runId === undefined ? {} : { runId }),
      simulated,
      capture: body,
      file,
      sheet: stored.sheet,
      faces: facesOf(body, stored.sheet),
    };
  });
}
