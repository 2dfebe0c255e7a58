import { MutationCache, QueryCache, QueryClient } from '@tanstack/react-query';
import { ApiProblem } from './api-problem.js';

/** Under this key stands who is signed in; it is emptied as soon as the server says that nobody is. */
export const ME_KEY = ['me'] as const;

const SECONDS = 1000;

export const queryClient = new QueryClient({
  queryCache: new QueryCache({ onError: (error, query) => signedOut(error, query.queryKey[0] === ME_KEY[0]) }),
  mutationCache: new MutationCache({ onError: (error) => signedOut(error, false) }),
  defaultOptions: {
    queries: {
      staleTime: 10 * SECONDS,
      // A refusal stays a refusal; only silence is worth asking again.
      retry: (failures, error) => !(error instanceof ApiProblem && error.status < 500) && failures < 2,
    },
    mutations: { retry: false },
  },
});

function signedOut(error: Error, wasMe: boolean): void {
  if (!wasMe && error instanceof ApiProblem && error.status === 401) void queryClient.invalidateQueries({ queryKey: ME_KEY });
}
