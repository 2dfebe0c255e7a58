import { useQueryClient } from '@tanstack/react-query';
import type { TagPage } from '../../../../shared/api/tags.js';
import { nobodyCanSay } from '../../../components/printing.js';
import { unitNumber } from '../../../lib/format.js';
import { unitTagQuery } from './get-unit-tag.js';

/** A tag as it is shown, and of which unit. */
export interface ShownTag {
  unit: number;
  tag: TagPage;
}

/**
 * Asks the server anew for tags that are about to be printed: a tag may have been withdrawn, or another one signed, since the page was
 * opened. Gives why they must not be printed as they are shown; undefined where all of them still stand. The page then shows what came.
 */
export function useAskWhetherTagsStand(): (shown: readonly ShownTag[]) => Promise<string | undefined> {
  const client = useQueryClient();
  return async (shown) => {
    const faults = await Promise.all(
      shown.map(async ({ unit, tag }): Promise<string | undefined> => {
        try {
          const now = await client.fetchQuery({ ...unitTagQuery(unit), staleTime: 0, retry: false });
          if (now.state.standing !== 'stands') return `Tag ${tag.content.tag} was withdrawn meanwhile.`;
          return now.jws === tag.jws ? undefined : `No. ${unitNumber(unit)} has another tag now: look at it, then print again.`;
        } catch (error) {
          return nobodyCanSay(tag.content.tag, error);
        }
      }),
    );
    const told = faults.filter((fault) => fault !== undefined);
    return told.length === 0 ? undefined : told.join(' ');
  };
}
