import type { PersonRow } from '../../../../shared/api/people.js';
import { formatDay, formatDayTime } from '../../../lib/format.js';

/** How somebody stands, in words. */
export function stateWords({ state, link }: PersonRow): string {
  if (state === 'deactivated') return 'deactivated';
  if (state === 'invited') return link ? `invited, until ${formatDay(link.expiresAt)}` : 'invited; the link ran out';
  return link ? `active; a link for a new password until ${formatDay(link.expiresAt)}` : 'active';
}

export const lastHereWords = ({ lastUsedAt }: PersonRow): string => (lastUsedAt === undefined ? 'not lately' : formatDayTime(lastUsedAt));
