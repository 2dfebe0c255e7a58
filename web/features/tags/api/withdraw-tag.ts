import { useMutation, useQueryClient } from '@tanstack/react-query';
import { call } from '../../../lib/call.js';

export function useWithdrawTag(unit: number, tag: string) {
  const queries = useQueryClient();
  return useMutation({
    mutationFn: (reason: string) => call('withdrawTag', { params: { tag }, body: { reason } }),
    onSuccess: async (answer) => {
      queries.setQueryData(['unit-tag', unit], answer);
      await queries.invalidateQueries({ queryKey: ['unit', unit] });
    },
  });
}
