import { queryOptions } from '@tanstack/react-query';
import { call } from '../../../lib/call.js';

/** A bench may be adding to the unit while its page is open: the page hears of it, and looks by itself only while it can't. */
export const LOOK_AGAIN_MS = 15_000;

export const unitQuery = (number: number) =>
  queryOptions({
    queryKey: ['unit', number],
    queryFn: ({ signal }) => call('getUnit', { params: { number }, signal }),
  });
