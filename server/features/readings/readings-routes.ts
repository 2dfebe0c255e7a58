import type { RegisterRoute } from '../../route.js';
import { recordInspection, recordOverride, recordReading, recordRepair } from './readings-service.js';

export function registerReadingRoutes(route: RegisterRoute): void {
  route('recordReading', async ({ params, body, person, trx, now }) => ({
    event: await recordReading(trx, params.number, body, person, now),
  }));
  route('recordInspection', async ({ params, body, person, trx, now }) => ({
    event: await recordInspection(trx, params.number, body, person, now),
  }));
  route('recordRepair', async ({ params, body, person, trx, now }) => ({
    event: await recordRepair(trx, params.number, body, person, now),
  }));
  route('recordOverride', async ({ params, body, person, trx, now }) => ({
    event: await recordOverride(trx, params.number, body.reason, person, now),
  }));
}
