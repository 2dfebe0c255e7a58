import { queryOptions } from '@tanstack/react-query';
import { call } from '../../../lib/call.js';
import { PEOPLE_KEY } from './list-people.js';

export const personQuery = (id: string) =>
  queryOptions({ queryKey: [...PEOPLE_KEY, id], queryFn: ({ signal }) => call('getPerson', { params: { id }, signal }) });
