import { useInfiniteQuery } from '@tanstack/react-query';
import type { SessionRow } from '../../../../shared/api/people.js';
import { ErrorNote, Pending } from '../../../components/page-states.js';
import { formatDayTime } from '../../../lib/format.js';
import { sessionsQuery, useRevokeSession, useRevokeSessions } from '../api/sessions.js';

/** Where somebody is signed in: each line can be ended, and all of them. */
export function SessionList({ whose, name }: { whose: 'me' | { person: string }; name: string }) {
  const query = useInfiniteQuery(sessionsQuery(whose));
  const revoke = useRevokeSession(whose);
  const revokeAll = useRevokeSessions(whose);
  const sessions = query.data?.pages.flatMap(({ items }) => items) ?? [];
  const others = sessions.filter(({ current }) => !current).length;
  const error = revoke.error ?? revokeAll.error;
  return (
    <section aria-labelledby="sessions">
      <h2 id="sessions" className="section-heading">
        {whose === 'me' ? 'Where I am signed in' : `Where ${name} is signed in`}
      </h2>
      {query.isPending && <Pending what="the sessions" />}
      {query.isError && <ErrorNote error={query.error} retry={() => void query.refetch()} />}
      {query.data && sessions.length === 0 && <p className="py-4">Nowhere.</p>}
      <ul>
        {sessions.map((session) => (
          <li key={session.id} className="grid items-center gap-x-6 gap-y-1 border-b border-line py-2 wide:grid-cols-[1fr_auto]">
            <SessionLine session={session} />
            {!session.current && (
              <button
                type="button"
                className="button button-plain justify-self-start"
                disabled={revoke.isPending}
                onClick={() => revoke.mutate(session.id)}
              >
                End <span className="sr-only">the session from {session.from}</span>
              </button>
            )}
          </li>
        ))}
      </ul>
      {error && <ErrorNote error={error} />}
      {query.hasNextPage && (
        <button type="button" className="button button-plain mt-4" onClick={() => void query.fetchNextPage()}>
          More sessions
        </button>
      )}
      {others > 1 && (
        <button type="button" className="button button-plain mt-4" disabled={revokeAll.isPending} onClick={() => revokeAll.mutate()}>
          {whose === 'me' ? 'End every other one' : 'End every one'}
        </button>
      )}
      <p role="status" className="sr-only">
        {query.data ? `${sessions.length} sessions` : ''}
      </p>
    </section>
  );
}

function SessionLine({ session: { from, current, createdAt, lastUsedAt, expiresAt } }: { session: SessionRow }) {
  return (
    <div>
      <p>
        <b>{from}</b>
        {current ? ', this one' : ''}
      </p>
      <p className="lab">
        since {formatDayTime(createdAt)}
        {lastUsedAt === undefined ? ', not used since' : `, last used ${formatDayTime(lastUsedAt)}`}, ends {formatDayTime(expiresAt)}
      </p>
    </div>
  );
}
