import { zodResolver } from '@hookform/resolvers/zod';
import { useForm } from 'react-hook-form';
import { inviteSchema, type MadeLink } from '../../../../shared/api/people.js';
import { ROLES, type Role } from '../../../../shared/api/roles.js';
import { ErrorSummary, FormField } from '../../../components/form-field.js';
import { explain } from '../../../components/page-states.js';
import { faultsOf, faultsOfProblem, fieldId } from '../../../lib/form-faults.js';
import { useInvite } from '../api/change-person.js';

const LABELS: Record<string, string> = { name: 'Name', email: 'E-mail address', role: 'Role' };

/** What each role is there for, so that nobody is given more than they need. */
export const ROLE_WORDS: Record<Role, string> = {
  technician: 'technician: takes in, measures, mends, proves',
  lead: 'lead: the same, and sheets, sign-off, overrides',
  sales: 'sales: tags and buyers',
  admin: 'admin: people and settings; signs nothing off',
};

export function InviteForm({ onMade }: { onMade: (made: MadeLink) => void }) {
  const invite = useInvite();
  const { register, handleSubmit, formState, reset } = useForm({
    resolver: zodResolver(inviteSchema),
    defaultValues: { name: '', email: '', role: 'technician' as Role },
    shouldFocusError: false,
  });
  const pointed = faultsOfProblem(invite.error);
  const named = [...faultsOf(formState.errors), ...pointed];
  const faults = named.map(({ name, reason }) => ({ id: fieldId(name), label: LABELS[name] ?? name, reason }));
  const refused = invite.error && pointed.length === 0 ? explain(invite.error) : undefined;
  const summary = faults.length > 0 || !refused ? faults : [{ label: '', reason: `${refused.happened} ${refused.remedy}` }];
  const errorOf = (name: string): string | undefined => named.find((fault) => fault.name === name)?.reason;
  return (
    <form
      noValidate
      onSubmit={(event) =>
        void handleSubmit((body) =>
          invite.mutate(body, {
            onSuccess: (made) => {
              reset();
              onMade(made);
            },
          }),
        )(event)
      }
    >
      <ErrorSummary faults={summary} attempt={formState.submitCount + invite.failureCount} />
      <div className="grid items-start gap-4 wide:grid-cols-[1fr_1fr_1.4fr_auto]">
        <FormField id={fieldId('name')} label="Name" error={errorOf('name')}>
          {(a11y) => <input {...a11y} {...register('name')} maxLength={100} autoComplete="off" className="field" />}
        </FormField>
        <FormField id={fieldId('email')} label="E-mail address" error={errorOf('email')}>
          {(a11y) => <input {...a11y} {...register('email')} type="email" maxLength={320} autoComplete="off" className="field" />}
        </FormField>
        <FormField id={fieldId('role')} label="Role" error={errorOf('role')}>
          {(a11y) => (
            <select {...a11y} {...register('role')} className="field">
              {ROLES.map((role) => (
                <option key={role} value={role}>
                  {ROLE_WORDS[role]}
                </option>
              ))}
            </select>
          )}
        </FormField>
        <button type="submit" className="button wide:mt-7" disabled={invite.isPending}>
          {invite.isPending ? 'Inviting' : 'Invite'}
        </button>
      </div>
    </form>
  );
}
