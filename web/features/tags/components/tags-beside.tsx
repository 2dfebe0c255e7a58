import { useQueries } from '@tanstack/react-query';
import type { ReactNode } from 'react';
import { useSearchParams } from 'react-router-dom';
import { FormField } from '../../../components/form-field.js';
import { ApiProblem } from '../../../lib/api-problem.js';
import type { ShownTag } from '../api/ask-whether-tags-stand.js';
import { unitTagQuery } from '../api/get-unit-tag.js';
import { leftOutWords, named, unitsBeside } from '../units-beside.js';

const neverHadOne = (error: Error | null): boolean => error instanceof ApiProblem && error.status === 404;

export interface TagsBeside {
  /** Those that stand, as far as they have been fetched. */
  tags: readonly ShownTag[];
  /** Some are still being fetched: what is shown is not yet what was asked for. */
  pending: boolean;
  form: ReactNode;
}

/** Other units whose tags are printed in the same go, from the address (`with=0413 0414`): those that stand, and where to type them. */
export function useTagsBeside(unit: number, text: string): TagsBeside {
  const [query, setQuery] = useSearchParams();
  const { numbers, tooMany } = unitsBeside(text, unit);
  const found = useQueries({ queries: numbers.map((number) => ({ ...unitTagQuery(number), retry: false })) });
  const units = numbers.map((number, index) => {
    const { data, error = null, isPending = true } = found[index] ?? {};
    return { number, tag: data, stands: data?.state.standing === 'stands', error, isPending };
  });
  const tags = units.flatMap(({ number, tag, stands }) => (tag && stands ? [{ unit: number, tag }] : []));
  const waiting = units.filter(({ isPending }) => isPending);
  const unfetched = units.filter(({ tag, error }) => tag === undefined && error !== null && !neverHadOne(error));
  const without = units.filter((one) => !one.stands && !one.isPending && !unfetched.includes(one));
  const numbersOf = (some: typeof units): number[] => some.map(({ number }) => number);
  const left = leftOutWords({
    tooMany,
    without: numbersOf(without),
    unfetched: numbersOf(unfetched),
    why: unfetched[0]?.error?.message,
  });
  const fetchAgain = (): void => {
    found.forEach((one, index) => {
      if (numbersOf(unfetched).includes(numbers[index] ?? 0)) void one.refetch();
    });
  };
  const form = (
    <div className="mt-4">
      <FormField id="tags-beside" label="Units to print along" hint="Their numbers, like 0413 0414." error={left}>
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
      {unfetched.length > 0 && (
        <button type="button" className="button button-plain mt-2" onClick={fetchAgain}>
          Fetch them again
        </button>
      )}
      <p role="status" aria-busy={waiting.length > 0 ? true : undefined} className="text-ink2">
        {waiting.length > 0 && `Fetching ${named(numbersOf(waiting))}.`}
      </p>
    </div>
  );
  return { tags, pending: waiting.length > 0, form };
}
