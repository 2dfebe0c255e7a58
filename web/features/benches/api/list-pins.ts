import { infiniteQueryOptions } from '@tanstack/react-query';
import { call } from '../../../lib/call.js';

export const PINS_KEY = ['pins'] as const;

export const pinsQuery = infiniteQueryOptions({
  queryKey: PINS_KEY,
  queryFn: ({ pageParam, signal }) => call('listPins', { query: { cursor: pageParam }, signal }),
  initialPageParam: undefined as string | undefined,
  getNextPageParam: (page) => page.next,
});
