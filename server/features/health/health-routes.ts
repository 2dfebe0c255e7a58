import type { RegisterRoute } from '../../route.js';

export function registerHealthRoutes(route: RegisterRoute): void {
  route('health', async ({ trx }) => {
    await trx.raw('select 1');
    return { ok: true };
  });
}
