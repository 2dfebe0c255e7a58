import type { AppDependencies } from '../../app.js';
import { cursorOf, numberCursor, pageOf } from '../../paging.js';
import type { RegisterRoute } from '../../route.js';
import { csvOf } from './audit-csv.js';
import { listAudit, readAudit } from './audit-store.js';

export function registerAuditRoutes(route: RegisterRoute, deps: Pick<AppDependencies, 'db'>): void {
  route('listAudit', async ({ query: { cursor, limit, ...filter }, trx }) => {
    const rows = await listAudit(trx, filter, { before: numberCursor(cursor), limit: limit + 1 });
    return pageOf(rows, limit, (row) => cursorOf(String(row.id)));
  });

  route('exportAudit', ({ query, now, http }) => {
    http.response.attachment(`refettle-audit-${now.toISOString().slice(0, 10)}.csv`);
    return Promise.resolve(csvOf(readAudit(deps.db, query)));
  });
}
