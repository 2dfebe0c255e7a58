import { infiniteQueryOptions } from '@tanstack/react-query';
import { call } from '../../../lib/call.js';

const PAGE_LENGTH = 50;

export const unitsQuery = (view: { find?: string | undefined; stage?: string | undefined }) =>
  infiniteQueryOptions({
    queryKey: ['units', view],
    queryFn: ({ pageParam, signal }) =>
      call('listUnits', {
        query: {
          limit: PAGE_LENGTH,
          ...(view.find ? { find: view.find } : {}),
          ...(view.stage ? { stage: view.stage } : {}),
          ...(pageParam === '' ? {} : { cursor: pageParam }),
        },
        signal,
      }),
    initialPageParam: '',
    getNextPageParam: (last) => last.next,
  });
