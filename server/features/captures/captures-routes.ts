import { NotFoundError } from '../../errors.js';
import { findCapture } from '../../history/capture-store.js';
import { codesNamed, facesOf } from '../../history/faces.js';
import { findSheet } from '../../history/sheet-store.js';
import { findUnit } from '../../history/unit-store.js';
import type { RegisterRoute } from '../../route.js';
import { recordCapture } from './captures-service.js';

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
      faces: facesOf(codesNamed(body.answer), stored.sheet),
    };
  });
}
