import { infiniteQueryOptions } from '@tanstack/react-query';
import type { AuditFilter } from '../../../../shared/api/audit.js';
import { routeUrl } from '../../../../shared/api/routes.js';
import { call } from '../../../lib/call.js';

export const auditQuery = (filter: AuditFilter) =>
  infiniteQueryOptions({
    queryKey: ['audit', filter],
    queryFn: ({ pageParam, signal }) => call('listAudit', { query: { ...filter, cursor: pageParam }, signal }),
    initialPageParam: undefined as string | undefined,
    getNextPageParam: (page) => page.next,
  });

/** Where the browser fetches the same as CSV. */
export const auditCsvUrl = (filter: AuditFilter): string => routeUrl('exportAudit', { query: filter });
