import { infiniteQueryOptions } from '@tanstack/react-query';
import { call } from '../../../lib/call.js';

export const BENCHES_KEY = ['benches'] as const;

export const benchesQuery = infiniteQueryOptions({
  queryKey: BENCHES_KEY,
  queryFn: ({ pageParam, signal }) => call('listBenches', { query: { cursor: pageParam }, signal }),
  initialPageParam: undefined as string | undefined,
  getNextPageParam: (page) => page.next,
});
