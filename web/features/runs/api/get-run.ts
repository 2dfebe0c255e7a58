import { queryOptions } from '@tanstack/react-query';
import { call } from '../../../lib/call.js';

/** A bench log never changes once it is stored. */
export const runQuery = (id: string) =>
  queryOptions({ queryKey: ['run', id], queryFn: ({ signal }) => call('getRun', { params: { id }, signal }), staleTime: Infinity });
