import { useQuery } from '@tanstack/react-query';
import { Link, useParams } from 'react-router-dom';
import type { PersonRow } from '../../shared/api/people.js';
import { PageHeading } from '../components/page-heading.js';
import { Fetched } from '../components/page-states.js';
import { SessionList } from '../features/account/components/session-list.js';
import { personQuery } from '../features/people/api/get-person.js';
import { MakeLink } from '../features/people/components/make-link.js';
import { lastHereWords, stateWords } from '../features/people/components/person-words.js';
import { RoleForm } from '../features/people/components/role-form.js';
import { StandingForm } from '../features/people/components/standing-form.js';
import { formatDate } from '../lib/format.js';
import { useSignedIn } from '../lib/signed-in.js';
import { paths } from '../paths.js';

export function PersonPage() {
  const { id = '' } = useParams();
  const query = useQuery(personQuery(id));
  return (
    <Fetched query={query} what="the person">
      {(person) => <Person person={person} />}
    </Fetched>
  );
}

function Person({ person }: { person: PersonRow }) {
  const { user } = useSignedIn();
  const own = person.id === user.id;
  return (
    <>
      <PageHeading title={person.name} />
      <p>
        {person.role}, {stateWords(person)}. {person.email}
      </p>
      <p className="lab mb-6">
        on the books since {formatDate(person.addedAt)}, last here: {lastHereWords(person)}.{' '}
        <Link to={paths.audit({ who: person.id })}>What {own ? 'you' : person.name} changed</Link>
      </p>
      <div className="grid gap-x-11 gap-y-8 wide:grid-cols-2">
        <section aria-labelledby="standing" className="grid content-start gap-5">
          <h2 id="standing" className="section-heading">
            Role and standing
          </h2>
          {own ? <p>This is you. Another admin changes your role; your password and sessions are under {account}.</p> : null}
          {!own && person.state !== 'deactivated' && (
            <>
              <RoleForm key={person.role} person={person} />
              <MakeLink person={person} />
            </>
          )}
          <StandingForm person={person} own={own} />
        </section>
        <SessionList whose={{ person: person.id }} name={person.name} />
      </div>
    </>
  );
}

const account = <Link to={paths.account()}>your account</Link>;
