import { useMutation, useQueryClient } from '@tanstack/react-query';
import type { RequestBody } from '../../../../shared/api/routes.js';
import { call } from '../../../lib/call.js';

export function useRecordRepair(number: number) {
  const queries = useQueryClient();
  return useMutation({
    mutationFn: (work: { body: RequestBody<'recordRepair'>; idempotencyKey: string }) =>
      call('recordRepair', { params: { number }, ...work }),
    onSuccess: () => queries.invalidateQueries({ queryKey: ['unit', number] }),
  });
}
