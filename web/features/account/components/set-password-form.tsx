import { zodResolver } from '@hookform/resolvers/zod';
import { useForm } from 'react-hook-form';
import { z } from 'zod';
import { newPasswordSchema } from '../../../../shared/api/sessions.js';
import { ErrorSummary, FormField } from '../../../components/form-field.js';
import { explain } from '../../../components/page-states.js';
import { faultsOf, faultsOfProblem, fieldId } from '../../../lib/form-faults.js';
import { useSetPasswordByLink } from '../api/one-time-link.js';

const passwordSchema = z.strictObject({ password: newPasswordSchema });

/** By a one-time link: the password, and then straight in. */
export function SetPasswordForm({ token, email, onSignedIn }: { token: string; email: string; onSignedIn: () => void }) {
  const setPassword = useSetPasswordByLink(token);
  const { register, handleSubmit, formState } = useForm({
    resolver: zodResolver(passwordSchema),
    defaultValues: { password: '' },
    shouldFocusError: false,
  });
  const pointed = faultsOfProblem(setPassword.error);
  const named = [...faultsOf(formState.errors), ...pointed];
  const faults = named.map(({ reason }) => ({ id: fieldId('password'), label: 'Password', reason }));
  const refused = setPassword.error && pointed.length === 0 ? explain(setPassword.error) : undefined;
  const summary = faults.length > 0 || !refused ? faults : [{ label: '', reason: `${refused.happened} ${refused.remedy}` }];
  return (
    <form
      noValidate
      onSubmit={(event) => void handleSubmit(({ password }) => setPassword.mutate(password, { onSuccess: onSignedIn }))(event)}
    >
      <ErrorSummary faults={summary} attempt={formState.submitCount + setPassword.failureCount} />
      <div className="grid gap-4">
        <FormField id={fieldId('email')} label="E-mail address" hint="By this you sign in from now on.">
          {(a11y) => <input {...a11y} type="email" autoComplete="username" readOnly value={email} className="field" />}
        </FormField>
        <FormField
          id={fieldId('password')}
          label="Password"
          hint="At least 12 characters; a few words are easier to keep than signs."
          error={named[0]?.reason}
        >
          {(a11y) => <input {...a11y} {...register('password')} type="password" autoComplete="new-password" className="field" />}
        </FormField>
        <button type="submit" className="button" disabled={setPassword.isPending}>
          {setPassword.isPending ? 'Setting it' : 'Set the password and sign in'}
        </button>
      </div>
    </form>
  );
}
