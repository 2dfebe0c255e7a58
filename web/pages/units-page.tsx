import { useEffect, useState } from 'react';
import { useInfiniteQuery } from '@tanstack/react-query';
import { Link, useSearchParams } from 'react-router-dom';
import { mayDo } from '../../shared/api/roles.js';
import { PageHeading } from '../components/page-heading.js';
import { ErrorNote, Pending } from '../components/page-states.js';
import { unitsQuery } from '../features/units/api/list-units.js';
import { isStage, STAGES_IN_ORDER, UnitsTable } from '../features/units/components/units-table.js';
import { useSignedIn } from '../lib/signed-in.js';
import { paths } from '../paths.js';

/** After the last key, before the list is asked anew. */
const TYPING_PAUSE_MS = 300;

function useFindInAddress(): { find: string; setFind: (find: string) => void; stage: string | undefined } {
  const [query, setQuery] = useSearchParams();
  const stage = query.get('stage');
  const inAddress = query.get('find') ?? '';
  const [find, setFind] = useState(inAddress);
  useEffect(() => setFind(inAddress), [inAddress]);
  useEffect(() => {
    if (find.trim() === inAddress) return;
    const timer = setTimeout(() => {
      setQuery(
        (before) => {
          const next = new URLSearchParams(before);
          if (find.trim()) next.set('find', find.trim());
          else next.delete('find');
          return next;
        },
        { replace: true, preventScrollReset: true },
      );
    }, TYPING_PAUSE_MS);
    return () => clearTimeout(timer);
  }, [find, inAddress, setQuery]);
  return { find, setFind, stage: isStage(stage) ? stage : undefined };
}

export function UnitsPage() {
  const { user, shop } = useSignedIn();
  const { find, setFind, stage } = useFindInAddress();
  const [query] = useSearchParams();
  const units = useInfiniteQuery(unitsQuery({ find: query.get('find') ?? undefined, stage }));
  const rows = units.data?.pages.flatMap((page) => page.items) ?? [];
  const filtered = stage !== undefined || Boolean(query.get('find'));
  const mayTakeIn = mayDo(user.role, 'unit.take-in');
  const count = units.data && !units.hasNextPage ? `: ${rows.length}` : '';
  return (
    <>
      <div className="flex flex-wrap items-center gap-x-5 gap-y-3">
        <PageHeading title={`${filtered ? 'Units found' : 'Units'}${count}`} />
        <div className="order-last flex w-full items-center gap-3 wide:order-none wide:ml-auto wide:w-auto">
          <label htmlFor="find" className="lab">
            Find
          </label>
          <input
            id="find"
            type="search"
            maxLength={100}
            className="field wide:w-[420px]"
            placeholder="number, serial, maker or model"
            value={find}
            onChange={(event) => setFind(event.target.value)}
          />
        </div>
        {mayTakeIn && (
          <Link className="button ml-auto wide:ml-0" to={paths.takeIn()}>
            Take in a unit
          </Link>
        )}
      </div>
      <nav aria-label="Stage" className="word-tabs mt-4 overflow-x-auto border-t-2 border-b border-t-ink border-b-line">
        {[undefined, ...STAGES_IN_ORDER].map((one) => (
          <Link
            key={one ?? 'all'}
            to={paths.units({ stage: one, find: query.get('find') ?? undefined })}
            {...(one === stage ? { 'aria-current': 'true' as const } : {})}
          >
            {one ?? 'every stage'}
          </Link>
        ))}
      </nav>
      <p role="status" className="sr-only">
        {units.data ? `${rows.length} units shown` : ''}
      </p>
      {units.isError && <ErrorNote error={units.error} retry={() => void units.refetch()} />}
      {units.isPending && <Pending what="the units" />}
      {units.data && rows.length === 0 && (
        <div className="py-6">
          {filtered ? (
            <p>
              Nothing matches. Look for fewer signs, or at <Link to={paths.units()}>every unit</Link>.
            </p>
          ) : (
            <p>
              No unit is on the books yet.{' '}
              {mayTakeIn
                ? 'Take in the first one: its rating plate and what it is said to do.'
                : 'A technician or a lead takes in the first one.'}
            </p>
          )}
        </div>
      )}
      {rows.length > 0 && <UnitsTable rows={rows} currency={shop.currency} nowMs={Date.now()} />}
      {units.hasNextPage && (
        <button
          type="button"
          className="button button-plain mt-4"
          disabled={units.isFetchingNextPage}
          onClick={() => void units.fetchNextPage()}
        >
          {units.isFetchingNextPage ? 'Fetching more' : 'More units'}
        </button>
      )}
    </>
  );
}
