import { useState } from 'react';
import type { PersonRow } from '../../../../shared/api/people.js';
import { roleSchema, ROLES } from '../../../../shared/api/roles.js';
import { FormField } from '../../../components/form-field.js';
import { ErrorNote } from '../../../components/page-states.js';
import { fieldId } from '../../../lib/form-faults.js';
import { useChangeRole } from '../api/change-person.js';
import { ROLE_WORDS } from './invite-form.js';

export function RoleForm({ person }: { person: PersonRow }) {
  const change = useChangeRole(person.id);
  const [role, setRole] = useState(person.role);
  return (
    <form
      noValidate
      className="flex flex-wrap items-end gap-3"
      onSubmit={(event) => {
        event.preventDefault();
        change.mutate(role);
      }}
    >
      <FormField id={fieldId('role')} label="Role" hint="It holds from the next click on." className="min-w-56 grow">
        {(a11y) => (
          <select {...a11y} className="field" value={role} onChange={(event) => setRole(roleSchema.parse(event.target.value))}>
            {ROLES.map((one) => (
              <option key={one} value={one}>
                {ROLE_WORDS[one]}
              </option>
            ))}
          </select>
        )}
      </FormField>
      <button type="submit" className="button button-plain" disabled={change.isPending || role === person.role}>
        Change the role
      </button>
      <p role="status" className="w-full">
        {change.isSuccess && change.data.role === role ? `${person.name} is ${change.data.role} now.` : ''}
      </p>
      {change.error && (
        <div className="w-full">
          <ErrorNote error={change.error} />
        </div>
      )}
    </form>
  );
}
