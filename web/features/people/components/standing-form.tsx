import { deactivateSchema, type PersonRow } from '../../../../shared/api/people.js';
import { ErrorNote } from '../../../components/page-states.js';
import { ReasonForm } from '../../../components/reason-form.js';
import { useActivate, useDeactivate } from '../api/change-person.js';

/** Out and in again. Going out asks why, and says what it means, before it is done. */
export function StandingForm({ person, own }: { person: PersonRow; own: boolean }) {
  return person.state === 'deactivated' ? <Activate person={person} /> : <Deactivate person={person} own={own} />;
}

function Activate({ person }: { person: PersonRow }) {
  const activate = useActivate(person.id);
  return (
    <div>
      <p className="mb-3">
        {person.name} is deactivated and is let in nowhere. What they did stays theirs. Back again they sign in with the password of before.
      </p>
      <button type="button" className="button button-plain" disabled={activate.isPending} onClick={() => activate.mutate()}>
        Reactivate {person.name}
      </button>
      {activate.error && <ErrorNote error={activate.error} />}
    </div>
  );
}

function Deactivate({ person, own }: { person: PersonRow; own: boolean }) {
  const deactivate = useDeactivate(person.id);
  return (
    <ReasonForm
      summary={`Deactivate ${person.name}`}
      label="Why"
      hint="Kept in the audit log."
      button="Deactivate"
      maxLength={500}
      schema={deactivateSchema}
      sending={deactivate}
      send={(reason) => deactivate.mutate(reason)}
    >
      <p>
        {own ? 'This is you: you are signed out at once, and another admin must let you in again. ' : ''}
        Every session and link ends at once, also in the middle of a request. What they did stays theirs.
      </p>
    </ReasonForm>
  );
}
