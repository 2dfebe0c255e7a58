import { useMutation } from '@tanstack/react-query';
import type { RequestBody } from '../../../../shared/api/routes.js';
import { call } from '../../../lib/call.js';

export function useCreateFirstAdmin() {
  return useMutation({ mutationFn: (body: RequestBody<'createFirstAdmin'>) => call('createFirstAdmin', { body }) });
}
