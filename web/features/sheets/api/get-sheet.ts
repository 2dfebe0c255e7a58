import { queryOptions, skipToken } from '@tanstack/react-query';
import { call } from '../../../lib/call.js';

/** The newest edition of a family's sheet; asks nothing without a family. */
export const sheetQuery = (family: string | undefined) =>
  queryOptions({
    queryKey: ['sheets', family],
    queryFn: family === undefined ? skipToken : ({ signal }) => call('getSheet', { params: { family }, query: {}, signal }),
    staleTime: 300_000,
  });
