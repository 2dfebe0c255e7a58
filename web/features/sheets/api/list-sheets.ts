import { queryOptions } from '@tanstack/react-query';
import { call } from '../../../lib/call.js';

export const sheetsQuery = queryOptions({
  queryKey: ['sheets'],
  queryFn: ({ signal }) => call('listSheets', { query: { limit: 200 }, signal }),
  staleTime: 300_000,
});
