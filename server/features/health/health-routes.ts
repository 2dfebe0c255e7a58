import { UnavailableError } from '../../errors.js';
import type { RegisterRoute } from '../../route.js';

export function registerHealthRoutes(route: RegisterRoute): void {
  route('health', async ({ trx }) => {
    try {
      await trx.raw('select 1');
    } catch (cause) {
      throw new UnavailableError('The database does not answer.', { cause });
    }
    return { ok: true };
  });
}
