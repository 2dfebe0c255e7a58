import { queryOptions, useMutation, useQueryClient } from '@tanstack/react-query';
import { call } from '../../../lib/call.js';

/** Whose link it is; asked once, for it changes nothing while the page stands open. */
export const linkQuery = (token: string) =>
  queryOptions({
    queryKey: ['one-time-link', token],
    queryFn: ({ signal }) => call('lookAtLink', { body: { token }, signal }),
    staleTime: Infinity,
    gcTime: 0,
  });

/** Sets the password and signs in with it; whoever was signed in on this device before is so no longer. */
export function useSetPasswordByLink(token: string) {
  const queries = useQueryClient();
  return useMutation({
    mutationFn: async (password: string) => {
      const { email } = await call('useLink', { body: { token, password } });
      return call('signIn', { body: { email, password, keep: 'cookie' } });
    },
    onSuccess: () => queries.clear(),
  });
}
