import { useState } from 'react';
import { deactivateSchema, type PersonRow } from '../../../../shared/api/people.js';
import { FormField } from '../../../components/form-field.js';
import { ErrorNote } from '../../../components/page-states.js';
import { fieldId } from '../../../lib/form-faults.js';
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
  const [reason, setReason] = useState('');
  const [fault, setFault] = useState<string>();
  return (
    <details>
      <summary className="flex min-h-11 cursor-pointer items-center text-rim underline">Deactivate {person.name}</summary>
      <form
        noValidate
        className="grid gap-3 pb-3"
        onSubmit={(event) => {
          event.preventDefault();
          const parsed = deactivateSchema.safeParse({ reason });
          setFault(parsed.error?.issues[0]?.message);
          if (parsed.success) deactivate.mutate(parsed.data.reason);
        }}
      >
        <p>
          {own ? 'This is you: you are signed out at once, and another admin must let you in again. ' : ''}
          Every session and link ends at once, also in the middle of a request. What they did stays theirs.
        </p>
        <FormField id={fieldId('reason')} label="Why" hint="Kept in the audit log." error={fault}>
          {(a11y) => (
            <textarea
              {...a11y}
              rows={2}
              maxLength={500}
              className="field"
              value={reason}
              onChange={(event) => setReason(event.target.value)}
            />
          )}
        </FormField>
        {deactivate.error && <ErrorNote error={deactivate.error} />}
        <div>
          <button type="submit" className="button button-plain" disabled={deactivate.isPending}>
            Deactivate
          </button>
        </div>
      </form>
    </details>
  );
}
