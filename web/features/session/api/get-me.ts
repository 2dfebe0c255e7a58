import { queryOptions } from '@tanstack/react-query';
import { call } from '../../../lib/call.js';
import { ME_KEY } from '../../../lib/query-client.js';

export const meQuery = queryOptions({ queryKey: ME_KEY, queryFn: ({ signal }) => call('me', { signal }), staleTime: 60_000 });
