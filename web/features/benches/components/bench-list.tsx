import { useState } from 'react';
import type { Bench } from '../../../../shared/api/benches.js';
import { ErrorNote } from '../../../components/page-states.js';
import { formatDate, formatDayTime } from '../../../lib/format.js';
import { useRenewToken, useRevokeBench } from '../api/change-bench.js';

type OnToken = (made: { name: string; token: string }) => void;

export function BenchList({ benches, onToken }: { benches: readonly Bench[]; onToken: OnToken }) {
  return (
    <ul>
      {benches.map((bench) => (
        <li key={bench.id} className="border-b border-line py-4">
          <BenchEntry bench={bench} onToken={onToken} />
        </li>
      ))}
    </ul>
  );
}

function BenchEntry({ bench, onToken }: { bench: Bench; onToken: OnToken }) {
  const revoked = bench.revokedAt !== undefined;
  return (
    <article aria-labelledby={`bench-${bench.id}`} className="grid gap-x-11 gap-y-3 wide:grid-cols-[1fr_1fr_220px]">
      <div>
        <h3 id={`bench-${bench.id}`} className="text-[21px] leading-[26px] font-bold">
          {bench.name}
        </h3>
        <p>{standingOf(bench)}</p>
        <p className="lab">
          made {formatDate(bench.madeAt)} by {bench.madeBy.name}
        </p>
      </div>
      <dl className="grid content-start grid-cols-[70px_1fr] gap-x-3 gap-y-1">
        <dt className="lab">people</dt>
        <dd>
          {bench.people.length === 0
            ? 'nobody has signed on yet'
            : bench.people.map(({ id, name, lastSignedOnAt }) => (
                <span key={id} className="block">
                  {name} <span className="lab">last {formatDayTime(lastSignedOnAt)}</span>
                </span>
              ))}
        </dd>
        <dt className="lab">rig</dt>
        <dd>
          {bench.rig ? (
            <>
              {bench.rig.name}
              {bench.rig.instruments.map(({ id, kind, port }) => (
                <span key={id} className="lab block">
                  {id}, {kind}
                  {port === undefined ? '' : `, ${port}`}
                </span>
              ))}
            </>
          ) : (
            'not told yet'
          )}
        </dd>
      </dl>
      <BenchActions bench={bench} revoked={revoked} onToken={onToken} />
    </article>
  );
}

function standingOf({ revokedAt, lastSeenAt }: Bench): string {
  if (revokedAt !== undefined) return `Revoked ${formatDayTime(revokedAt)}: its token is no longer good.`;
  return lastSeenAt === undefined ? 'Has never called: its token has not been used yet.' : `Last called ${formatDayTime(lastSeenAt)}.`;
}

/** Both end what the bench holds now, so each asks once more, with what it means. */
function BenchActions({ bench, revoked, onToken }: { bench: Bench; revoked: boolean; onToken: OnToken }) {
  const renew = useRenewToken();
  const revoke = useRevokeBench();
  const [asks, setAsks] = useState<'renew' | 'revoke'>();
  const error = renew.error ?? revoke.error;
  const done = (): void => setAsks(undefined);
  const begin = (what: 'renew' | 'revoke'): void => {
    renew.reset();
    revoke.reset();
    setAsks(what);
  };
  const go = (): void => {
    if (asks === 'revoke') revoke.mutate(bench.id, { onSuccess: done });
    else
      renew.mutate(bench.id, {
        onSuccess: ({ token }) => {
          done();
          onToken({ name: bench.name, token });
        },
      });
  };
  return (
    <div className="grid content-start gap-2">
      {asks === undefined ? (
        <>
          <button type="button" className="button button-plain" onClick={() => begin('renew')}>
            New token <span className="sr-only">for {bench.name}</span>
          </button>
          {!revoked && (
            <button type="button" className="button button-plain" onClick={() => begin('revoke')}>
              Revoke <span className="sr-only">{bench.name}</span>
            </button>
          )}
        </>
      ) : (
        <>
          <p role="status">
            {asks === 'revoke'
              ? 'What waits on that computer is not lost, but nothing more comes from it until the bench has a new token.'
              : revoked
                ? 'The bench comes back, with its history, for whoever has the new token.'
                : 'The token it has now ends at once; the computer must join again.'}
          </p>
          <button type="button" className="button" disabled={renew.isPending || revoke.isPending} onClick={go}>
            {asks === 'revoke' ? `Revoke ${bench.name}` : `Give ${bench.name} a new token`}
          </button>
          <button type="button" className="button button-plain" onClick={done}>
            Leave it as it is
          </button>
        </>
      )}
      {error && <ErrorNote error={error} />}
    </div>
  );
}
