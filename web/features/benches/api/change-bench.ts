import { useMutation, useQueryClient } from '@tanstack/react-query';
import { call } from '../../../lib/call.js';
import { BENCHES_KEY } from './list-benches.js';

const useThenListAnew = () => {
  const queries = useQueryClient();
  return { onSuccess: () => queries.invalidateQueries({ queryKey: BENCHES_KEY }) };
};

/** The answer holds the token; nothing else ever does. */
export function useCreateBench() {
  return useMutation({ mutationFn: (name: string) => call('createBench', { body: { name } }), ...useThenListAnew() });
}

export function useRenewToken() {
  return useMutation({ mutationFn: (id: string) => call('renewBenchToken', { params: { id } }), ...useThenListAnew() });
}

export function useRevokeBench() {
  return useMutation({ mutationFn: (id: string) => call('revokeBench', { params: { id } }), ...useThenListAnew() });
}
