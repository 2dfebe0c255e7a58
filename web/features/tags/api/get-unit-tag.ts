import { queryOptions } from '@tanstack/react-query';
import { call } from '../../../lib/call.js';

export const unitTagQuery = (number: number) =>
  queryOptions({ queryKey: ['unit-tag', number], queryFn: ({ signal }) => call('getUnitTag', { params: { number }, signal }) });
