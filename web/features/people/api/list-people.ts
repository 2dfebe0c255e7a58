import { infiniteQueryOptions } from '@tanstack/react-query';
import { call } from '../../../lib/call.js';

export const PEOPLE_KEY = ['people'] as const;

export const peopleQuery = infiniteQueryOptions({
  queryKey: [...PEOPLE_KEY, 'all'],
  queryFn: ({ pageParam, signal }) => call('listPeople', { query: { cursor: pageParam }, signal }),
  initialPageParam: undefined as string | undefined,
  getNextPageParam: (page) => page.next,
});
