import { queryOptions } from '@tanstack/react-query';
import { call } from '../../../lib/call.js';

/** A capture never changes once it is stored. */
export const captureQuery = (id: string) =>
  queryOptions({ queryKey: ['capture', id], queryFn: ({ signal }) => call('getCapture', { params: { id }, signal }), staleTime: Infinity });
