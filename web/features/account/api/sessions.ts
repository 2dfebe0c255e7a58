import { infiniteQueryOptions, useMutation, useQueryClient } from '@tanstack/react-query';
import { call } from '../../../lib/call.js';

/** Whose: the own ones (`me`), or by an admin those of the person with this id. */
type Whose = 'me' | { person: string };
const keyOf = (whose: Whose) => ['sessions', whose] as const;

export const sessionsQuery = (whose: Whose) =>
  infiniteQueryOptions({
    queryKey: keyOf(whose),
    queryFn: ({ pageParam, signal }) =>
      whose === 'me'
        ? call('listOwnSessions', { query: { cursor: pageParam }, signal })
        : call('listSessions', { params: { id: whose.person }, query: { cursor: pageParam }, signal }),
    initialPageParam: undefined as string | undefined,
    getNextPageParam: (page) => page.next,
  });

const useThenLookAnew = (whose: Whose) => {
  const queries = useQueryClient();
  return { onSuccess: () => queries.invalidateQueries({ queryKey: keyOf(whose) }) };
};

export function useRevokeSession(whose: Whose) {
  return useMutation({
    mutationFn: (session: string) =>
      whose === 'me' ? call('revokeOwnSession', { params: { session } }) : call('revokeSession', { params: { id: whose.person, session } }),
    ...useThenLookAnew(whose),
  });
}

/** Of somebody else every one; of one's own every other one. */
export function useRevokeSessions(whose: Whose) {
  return useMutation({
    mutationFn: () => (whose === 'me' ? call('revokeOtherSessions', {}) : call('revokeSessions', { params: { id: whose.person } })),
    ...useThenLookAnew(whose),
  });
}
