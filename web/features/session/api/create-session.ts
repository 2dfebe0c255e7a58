import { useMutation, useQueryClient } from '@tanstack/react-query';
import type { RequestBody } from '../../../../shared/api/routes.js';
import { call } from '../../../lib/call.js';

/** Signs in; the token goes to a cookie that no script can read. */
export function useCreateSession() {
  const queries = useQueryClient();
  return useMutation({
    mutationFn: (credentials: Omit<RequestBody<'signIn'>, 'keep'>) => call('signIn', { body: { ...credentials, keep: 'cookie' } }),
    onSuccess: () => queries.clear(),
  });
}
