import { zodResolver } from '@hookform/resolvers/zod';
import { useForm } from 'react-hook-form';
import { changePasswordSchema } from '../../../../shared/api/people.js';
import { ErrorSummary, FormField } from '../../../components/form-field.js';
import { explain } from '../../../components/page-states.js';
import { faultsOf, faultsOfProblem, fieldId } from '../../../lib/form-faults.js';
import { plural } from '../../../lib/format.js';
import { useChangePassword } from '../api/change-password.js';

const LABELS: Record<string, string> = { oldPassword: 'Old password', newPassword: 'New password' };

export function ChangePasswordForm({ email }: { email: string }) {
  const change = useChangePassword();
  const { register, handleSubmit, formState, reset } = useForm({
    resolver: zodResolver(changePasswordSchema),
    defaultValues: { oldPassword: '', newPassword: '' },
    shouldFocusError: false,
  });
  const pointed = faultsOfProblem(change.error);
  const named = [...faultsOf(formState.errors), ...pointed];
  const faults = named.map(({ name, reason }) => ({ id: fieldId(name), label: LABELS[name] ?? name, reason }));
  const refused = change.error && pointed.length === 0 ? explain(change.error) : undefined;
  const summary = faults.length > 0 || !refused ? faults : [{ label: '', reason: `${refused.happened} ${refused.remedy}` }];
  const errorOf = (name: string): string | undefined => named.find((fault) => fault.name === name)?.reason;
  return (
    <section aria-labelledby="password" className="max-w-[560px]">
      <h2 id="password" className="section-heading">
        Password
      </h2>
      <form
        noValidate
        className="mt-3"
        onSubmit={(event) => void handleSubmit((body) => change.mutate(body, { onSuccess: () => reset() }))(event)}
      >
        <ErrorSummary faults={summary} attempt={formState.submitCount + change.failureCount} />
        {/* For a password manager, which otherwise guesses whose password this is. */}
        <input type="text" name="username" autoComplete="username" value={email} readOnly hidden />
        <div className="grid gap-4">
          <FormField
            id={fieldId('oldPassword')}
            label="Old password"
            hint="So that nobody changes it at a screen you left."
            error={errorOf('oldPassword')}
          >
            {(a11y) => <input {...a11y} {...register('oldPassword')} type="password" autoComplete="current-password" className="field" />}
          </FormField>
          <FormField
            id={fieldId('newPassword')}
            label="New password"
            hint="At least 12 characters; a few words are easier to keep than signs."
            error={errorOf('newPassword')}
          >
            {(a11y) => <input {...a11y} {...register('newPassword')} type="password" autoComplete="new-password" className="field" />}
          </FormField>
          <div>
            <button type="submit" className="button" disabled={change.isPending}>
              {change.isPending ? 'Changing it' : 'Change my password'}
            </button>
            <p role="status" className="mt-2">
              {change.isSuccess ? `Changed. ${plural(change.data.ended, 'other session')} of yours ended.` : ''}
            </p>
          </div>
        </div>
      </form>
    </section>
  );
}
