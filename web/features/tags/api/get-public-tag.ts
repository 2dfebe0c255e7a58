import { queryOptions } from '@tanstack/react-query';
import { call } from '../../../lib/call.js';

/** Always asked anew: a tag that stood a minute ago may have been withdrawn. */
export const publicTagQuery = (tag: string, proof: { signature?: string; word?: string }) =>
  queryOptions({
    queryKey: ['public-tag', tag, proof],
    queryFn: ({ signal }) => call('getPublicTag', { params: { tag }, query: proof, signal }),
    staleTime: 0,
    gcTime: 0,
  });
