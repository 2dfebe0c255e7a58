import { useMutation, useQueryClient } from '@tanstack/react-query';
import { call } from '../../../lib/call.js';

/** Signs out: the token is revoked, and nothing that was fetched stays on this device. */
export function useEndSession() {
  const queries = useQueryClient();
  return useMutation({ mutationFn: () => call('signOut', {}), onSuccess: () => queries.clear() });
}
