import { queryOptions, useMutation, useQueryClient } from '@tanstack/react-query';
import type { RequestBody } from '../../../../shared/api/routes.js';
import { call } from '../../../lib/call.js';
import { PINS_KEY } from './list-pins.js';

const OWN_PIN_KEY = ['own-pin'] as const;

export const ownPinQuery = queryOptions({ queryKey: OWN_PIN_KEY, queryFn: ({ signal }) => call('getOwnPin', { signal }) });

export function useSetOwnPin() {
  const queries = useQueryClient();
  return useMutation({
    mutationFn: (body: RequestBody<'setOwnPin'>) => call('setOwnPin', { body }),
    onSuccess: async (state) => {
      queries.setQueryData(OWN_PIN_KEY, state);
      await queries.invalidateQueries({ queryKey: PINS_KEY });
    },
  });
}
