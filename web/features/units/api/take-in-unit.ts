import { useMutation, useQueryClient } from '@tanstack/react-query';
import type { RequestBody } from '../../../../shared/api/routes.js';
import { call } from '../../../lib/call.js';

export function useTakeInUnit() {
  const queries = useQueryClient();
  return useMutation({
    mutationFn: (work: { body: RequestBody<'takeInUnit'>; idempotencyKey: string }) => call('takeInUnit', work),
    onSuccess: () => queries.invalidateQueries({ queryKey: ['units'] }),
  });
}
