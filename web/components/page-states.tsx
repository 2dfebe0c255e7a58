import { useEffect, useState, type ReactNode } from 'react';
import type { UseQueryResult } from '@tanstack/react-query';
import { Link } from 'react-router-dom';
import { ApiProblem } from '../lib/api-problem.js';
import { paths } from '../paths.js';
import { PageHeading } from './page-heading.js';

/** Before this, an answer that comes at once would only flicker. */
const SAY_SO_AFTER_MS = 300;

/** Waiting: says what for. */
export function Pending({ what }: { what: string }) {
  const [shown, setShown] = useState(false);
  useEffect(() => {
    const timer = setTimeout(() => setShown(true), SAY_SO_AFTER_MS);
    return () => clearTimeout(timer);
  }, []);
  return (
    <p role="status" aria-busy="true" className="min-h-[60vh] py-6 text-ink2">
      {shown ? `Fetching ${what}.` : ''}
    </p>
  );
}

/** What happened, and what to do. */
export function explain(error: Error): { happened: string; remedy: string } {
  if (error instanceof ApiProblem) {
    if (error.status === 403) return { happened: error.message, remedy: error.remedy ?? 'Ask somebody whose role allows it.' };
    if (error.status === 404)
      return { happened: error.message, remedy: error.remedy ?? 'Look at the number in the address, or find the unit in the list.' };
    if (error.status === 429) return { happened: error.message, remedy: error.remedy ?? 'Wait a minute, then try again.' };
    return {
      happened: error.message,
      remedy:
        error.remedy ??
        (error.status >= 500 ? 'Nothing was stored. Try again; if it happens again, tell the admin.' : 'Change it and try again.'),
    };
  }
  return {
    happened: error.message || 'The server does not answer.',
    remedy: 'Look at the network and whether the server runs, then try again. What you typed is still here.',
  };
}

/** A failure beside the thing that failed. */
export function ErrorNote({ error, retry, children }: { error: Error; retry?: () => void; children?: ReactNode }) {
  const { happened, remedy } = explain(error);
  return (
    <div role="alert" className="my-3 border-2 border-fail bg-fail-ground px-4 py-3">
      <p className="font-bold">{happened}</p>
      <p>{remedy}</p>
      {children}
      {retry && (
        <button type="button" className="button button-plain mt-2" onClick={retry}>
          Try again
        </button>
      )}
    </div>
  );
}

/** A whole page that could not be fetched. */
export function PageError({ error, retry, what }: { error: Error; retry: () => void; what: string }) {
  const notThere = error instanceof ApiProblem && error.status === 404;
  return (
    <>
      <PageHeading title={notThere ? 'Not there' : `Could not fetch ${what}`} />
      <ErrorNote error={error} {...(notThere ? {} : { retry })} />
      <Link className="tap" to={paths.units()}>
        To the units
      </Link>
    </>
  );
}

/** Three of a page's four states; the fourth, empty, is the page's own. */
export function Fetched<T>({ query, what, children }: { query: UseQueryResult<T>; what: string; children: (data: T) => ReactNode }) {
  if (query.data !== undefined) return children(query.data);
  if (query.isError) return <PageError error={query.error} retry={() => void query.refetch()} what={what} />;
  return <Pending what={what} />;
}
