import { useState } from 'react';
import { useInfiniteQuery } from '@tanstack/react-query';
import { mayDo } from '../../shared/api/roles.js';
import { PageHeading } from '../components/page-heading.js';
import { ErrorNote, Pending } from '../components/page-states.js';
import { benchesQuery } from '../features/benches/api/list-benches.js';
import { pinsQuery } from '../features/benches/api/list-pins.js';
import { BenchList } from '../features/benches/components/bench-list.js';
import { NewBenchForm } from '../features/benches/components/new-bench-form.js';
import { PinList } from '../features/benches/components/pin-list.js';
import { TokenOnce } from '../features/benches/components/token-once.js';
import { useSignedIn } from '../lib/signed-in.js';

export function BenchesPage() {
  const { user } = useSignedIn();
  const allowed = mayDo(user.role, 'bench.write');
  return (
    <>
      <PageHeading title="Shared benches" />
      {allowed ? (
        <>
          <p className="mb-5 max-w-[720px]">
            A computer that several people work at. It has a token of its own, and people sign on to it by name and PIN when they begin
            something, so that each step stands in the name of whoever did it.
          </p>
          <Benches />
          <Pins />
        </>
      ) : (
        <p className="py-6">
          Leads and admins make benches and set PINs. You are signed in as {user.role}; your own PIN is under your account.
        </p>
      )}
    </>
  );
}

function Benches() {
  const benches = useInfiniteQuery(benchesQuery);
  const [made, setMade] = useState<{ name: string; token: string }>();
  const all = benches.data?.pages.flatMap(({ items }) => items) ?? [];
  return (
    <section aria-labelledby="benches" className="mb-9">
      <h2 id="benches" className="section-heading">
        Benches
      </h2>
      {made && <TokenOnce bench={made.name} token={made.token} onDone={() => setMade(undefined)} />}
      {benches.isPending && <Pending what="the benches" />}
      {benches.isError && <ErrorNote error={benches.error} retry={() => void benches.refetch()} />}
      {benches.data && all.length === 0 && (
        <p className="py-4">There is no shared bench yet. Make one here, then join it at its computer.</p>
      )}
      <BenchList benches={all} onToken={setMade} />
      {benches.hasNextPage && (
        <button type="button" className="button button-plain mt-4" onClick={() => void benches.fetchNextPage()}>
          More benches
        </button>
      )}
      {benches.data && (
        <div className="mt-5">
          <NewBenchForm onMade={setMade} />
        </div>
      )}
    </section>
  );
}

function Pins() {
  const { user } = useSignedIn();
  const pins = useInfiniteQuery(pinsQuery);
  const states = pins.data?.pages.flatMap(({ items }) => items) ?? [];
  return (
    <section aria-labelledby="pins">
      <h2 id="pins" className="section-heading">
        PINs
      </h2>
      <p className="my-3 max-w-[720px]">
        Each sets their own, under their account. Set one for somebody who forgot it; whoever knows another’s PIN can work in that name.
      </p>
      {pins.isPending && <Pending what="the PINs’ states" />}
      {pins.isError && <ErrorNote error={pins.error} retry={() => void pins.refetch()} />}
      {pins.data && states.length === 0 && <p className="py-4">Nobody here is a technician or a lead yet.</p>}
      <PinList states={states} ownId={user.id} />
      {pins.hasNextPage && (
        <button type="button" className="button button-plain mt-4" onClick={() => void pins.fetchNextPage()}>
          More people
        </button>
      )}
    </section>
  );
}
