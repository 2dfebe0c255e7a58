import { useMutation, useQueryClient } from '@tanstack/react-query';
import type { RequestBody } from '../../../../shared/api/routes.js';
import { call } from '../../../lib/call.js';

export function useChangePassword() {
  const queries = useQueryClient();
  return useMutation({
    mutationFn: (body: RequestBody<'changePassword'>) => call('changePassword', { body }),
    onSuccess: () => queries.invalidateQueries({ queryKey: ['sessions'] }),
  });
}
