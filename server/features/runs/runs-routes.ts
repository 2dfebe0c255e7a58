import { NotFoundError } from '../../errors.js';
import { captureBodiesOfRun } from '../../history/capture-store.js';
import { codesNamed, facesOf } from '../../history/faces.js';
import { findRun } from '../../history/run-store.js';
import { findSheet } from '../../history/sheet-store.js';
import { findUnit } from '../../history/unit-store.js';
import type { RegisterRoute } from '../../route.js';
import { recordRun } from './runs-service.js';

export function registerRunRoutes(route: RegisterRoute): void {
  route('recordRun', ({ params, body, person, bench, trx, now }) => recordRun(trx, params.number, body, { person, bench, now }));

  route('getRun', async ({ params, trx }) => {
    const run = await findRun(trx, params.id);
    const unit = run && (await findUnit(trx, run.unitNumber));
    if (!run || !unit) throw new NotFoundError('There is no such run.');
    const bodies = await captureBodiesOfRun(trx, run.id);
    const first = bodies[0];
    const sheet = first && (await findSheet(trx, first.family, first.sheetEdition))?.sheet;
    const { unitNumber: _number, ...rest } = run;
    return {
      ...rest,
      unit: { number: unit.number, maker: unit.plate.maker, model: unit.plate.model },
      answers: Object.fromEntries(bodies.map((body) => [body.captureId, body.answer])),
      faces: facesOf(
        bodies.flatMap(({ answer }) => codesNamed(answer)),
        sheet,
      ),
    };
  });
}
