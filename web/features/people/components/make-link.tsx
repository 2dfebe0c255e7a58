import { useState } from 'react';
import type { MadeLink, PersonRow } from '../../../../shared/api/people.js';
import { ErrorNote } from '../../../components/page-states.js';
import { useMakeLink } from '../api/change-person.js';
import { LinkOnce } from './link-once.js';

/** For a forgotten password, or an invitation that ran out. */
export function MakeLink({ person }: { person: PersonRow }) {
  const makeLink = useMakeLink(person.id);
  const [made, setMade] = useState<MadeLink>();
  const invited = person.state === 'invited';
  return (
    <div>
      <p className="mb-3">
        {invited
          ? `${person.name} has set no password yet. A new link ends the one before.`
          : `For a forgotten password: a link by which ${person.name} sets a new one. Their sessions end when it is used.`}
      </p>
      {made && <LinkOnce made={made} onDone={() => setMade(undefined)} />}
      <button
        type="button"
        className="button button-plain"
        disabled={makeLink.isPending}
        onClick={() => makeLink.mutate(undefined, { onSuccess: setMade })}
      >
        {invited ? 'Make a new invitation' : 'Make a link for a new password'}
      </button>
      {makeLink.error && <ErrorNote error={makeLink.error} />}
    </div>
  );
}
