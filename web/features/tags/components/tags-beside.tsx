import { useQueries } from '@tanstack/react-query';
import type { ReactNode } from 'react';
import { useSearchParams } from 'react-router-dom';
import type { TagPage } from '../../../../shared/api/tags.js';
import { FormField } from '../../../components/form-field.js';
import { unitNumber } from '../../../lib/format.js';
import { unitTagQuery } from '../api/get-unit-tag.js';

/** So many units more can be printed at once. */
const MOST_BESIDE = 40;

/** Other units whose tags are printed in the same go, from the address (`with=0413 0414`): those that stand, and where to type them. */
export function useTagsBeside(unit: number, text: string): { tags: TagPage[]; form: ReactNode } {
  const [query, setQuery] = useSearchParams();
  const numbers = [...new Set([...text.matchAll(/\d{1,9}/g)].map(([digits]) => Number(digits)))]
    .filter((number) => number > 0 && number !== unit)
    .slice(0, MOST_BESIDE);
  const found = useQueries({ queries: numbers.map((number) => ({ ...unitTagQuery(number), retry: false })) });
  const tags = found.flatMap(({ data }) => (data?.state.standing === 'stands' ? [data] : []));
  const left = numbers.filter((_number, index) => found[index]?.isPending === false && found[index].data?.state.standing !== 'stands');
  const form = (
    <FormField
      id="tags-beside"
      className="mt-4"
      label="Units to print along"
      hint="Their numbers, like 0413 0414."
      error={left.length > 0 ? `No standing tag, so left out: ${left.map((number) => `No. ${unitNumber(number)}`).join(', ')}.` : undefined}
    >
      {(a11y) => (
        <input
          {...a11y}
          className="field"
          autoComplete="off"
          defaultValue={text}
          onChange={(event) => {
            const next = new URLSearchParams(query);
            if (event.target.value.trim() === '') next.delete('with');
            else next.set('with', event.target.value);
            setQuery(next, { replace: true, preventScrollReset: true });
          }}
        />
      )}
    </FormField>
  );
  return { tags, form };
}
