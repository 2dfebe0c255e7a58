import { useState } from 'react';
import { useInfiniteQuery } from '@tanstack/react-query';
import type { MadeLink } from '../../shared/api/people.js';
import { mayDo } from '../../shared/api/roles.js';
import { PageHeading } from '../components/page-heading.js';
import { ErrorNote, Pending } from '../components/page-states.js';
import { peopleQuery } from '../features/people/api/list-people.js';
import { InviteForm } from '../features/people/components/invite-form.js';
import { LinkOnce } from '../features/people/components/link-once.js';
import { PeopleTable } from '../features/people/components/people-table.js';
import { useSignedIn } from '../lib/signed-in.js';

export function PeoplePage() {
  const { user } = useSignedIn();
  return (
    <>
      <PageHeading title="People" />
      {mayDo(user.role, 'person.read') ? (
        <People ownId={user.id} />
      ) : (
        <p className="py-6">Admins look after people. You are signed in as {user.role}; what is yours is under your account.</p>
      )}
    </>
  );
}

function People({ ownId }: { ownId: string }) {
  const query = useInfiniteQuery(peopleQuery);
  const [made, setMade] = useState<MadeLink>();
  const people = query.data?.pages.flatMap(({ items }) => items) ?? [];
  return (
    <>
      <section aria-labelledby="invite" className="mt-5 mb-9">
        <h2 id="invite" className="section-heading mb-3">
          Invite somebody
        </h2>
        {made && <LinkOnce made={made} onDone={() => setMade(undefined)} />}
        <InviteForm onMade={setMade} />
      </section>
      <section aria-labelledby="everybody">
        <h2 id="everybody" className="section-heading">
          Everybody
        </h2>
        {query.isPending && <Pending what="the people" />}
        {query.isError && <ErrorNote error={query.error} retry={() => void query.refetch()} />}
        {query.data && people.length === 0 && <p className="py-4">Nobody is on the books.</p>}
        {people.length > 0 && <PeopleTable people={people} ownId={ownId} />}
        {query.hasNextPage && (
          <button type="button" className="button button-plain mt-4" onClick={() => void query.fetchNextPage()}>
            More people
          </button>
        )}
      </section>
    </>
  );
}
