import { useMutation, useQueryClient } from '@tanstack/react-query';
import { call } from '../../../lib/call.js';
import { PINS_KEY } from './list-pins.js';

export function useSetPin(personId: string) {
  const queries = useQueryClient();
  return useMutation({
    mutationFn: (pin: string) => call('setPin', { params: { id: personId }, body: { pin } }),
    onSuccess: () => queries.invalidateQueries({ queryKey: PINS_KEY }),
  });
}

export function useClearPin(personId: string) {
  const queries = useQueryClient();
  return useMutation({
    mutationFn: () => call('clearPin', { params: { id: personId } }),
    onSuccess: () => queries.invalidateQueries({ queryKey: PINS_KEY }),
  });
}
