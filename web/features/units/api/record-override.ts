import { useMutation, useQueryClient } from '@tanstack/react-query';
import type { RequestBody } from '../../../../shared/api/routes.js';
import { call } from '../../../lib/call.js';

export function useRecordOverride(number: number) {
  const queries = useQueryClient();
  return useMutation({
    mutationFn: (work: { body: RequestBody<'recordOverride'>; idempotencyKey: string }) =>
      call('recordOverride', { params: { number }, ...work }),
    onSuccess: () => queries.invalidateQueries({ queryKey: ['unit', number] }),
  });
}
