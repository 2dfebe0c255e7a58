import { useMutation, useQueryClient } from '@tanstack/react-query';
import type { RequestBody } from '../../../../shared/api/routes.js';
import { call } from '../../../lib/call.js';

/** Signs off what the lead saw; the server refuses when the rules have changed since, and the page fetches them anew. */
export function useSignOff(number: number) {
  const queries = useQueryClient();
  return useMutation({
    mutationFn: (body: RequestBody<'signOff'>) => call('signOff', { params: { number }, body }),
    onSuccess: (tag) => queries.setQueryData(['unit-tag', number], tag),
    onSettled: () => queries.invalidateQueries({ queryKey: ['unit', number] }),
  });
}
