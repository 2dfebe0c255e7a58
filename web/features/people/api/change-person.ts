import { useMutation, useQueryClient } from '@tanstack/react-query';
import type { Role } from '../../../../shared/api/roles.js';
import type { RequestBody } from '../../../../shared/api/routes.js';
import { call } from '../../../lib/call.js';
import { PEOPLE_KEY } from './list-people.js';

/** Whatever changes about somebody shows in the list, on their page and in their sessions. */
const useThenLookAnew = () => {
  const queries = useQueryClient();
  return {
    onSuccess: async () => {
      await Promise.all([PEOPLE_KEY, ['sessions']].map((queryKey) => queries.invalidateQueries({ queryKey })));
    },
  };
};

/** The answer holds the link; nothing else ever does. */
export function useInvite() {
  return useMutation({ mutationFn: (body: RequestBody<'invitePerson'>) => call('invitePerson', { body }), ...useThenLookAnew() });
}

export function useMakeLink(id: string) {
  return useMutation({ mutationFn: () => call('makeLink', { params: { id } }), ...useThenLookAnew() });
}

export function useChangeRole(id: string) {
  return useMutation({ mutationFn: (role: Role) => call('changeRole', { params: { id }, body: { role } }), ...useThenLookAnew() });
}

export function useDeactivate(id: string) {
  return useMutation({
    mutationFn: (reason: string) => call('deactivatePerson', { params: { id }, body: { reason } }),
    ...useThenLookAnew(),
  });
}

export function useActivate(id: string) {
  return useMutation({ mutationFn: () => call('activatePerson', { params: { id } }), ...useThenLookAnew() });
}
