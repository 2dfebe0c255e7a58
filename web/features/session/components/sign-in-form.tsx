import { zodResolver } from '@hookform/resolvers/zod';
import { useForm } from 'react-hook-form';
import { signInSchema } from '../../../../shared/api/sessions.js';
import { ErrorSummary, FormField } from '../../../components/form-field.js';
import { explain } from '../../../components/page-states.js';
import { faultsOf, fieldId } from '../../../lib/form-faults.js';
import { useCreateSession } from '../api/create-session.js';

const credentialsSchema = signInSchema.omit({ keep: true });
const LABELS: Record<string, string> = { email: 'E-mail address', password: 'Password' };

export function SignInForm({ onSignedIn }: { onSignedIn: () => void }) {
  const createSession = useCreateSession();
  const { register, handleSubmit, formState } = useForm({
    resolver: zodResolver(credentialsSchema),
    defaultValues: { email: '', password: '' },
    shouldFocusError: false,
  });
  const { errors } = formState;
  const faults = faultsOf(errors).map(({ name, reason }) => ({ id: fieldId(name), label: LABELS[name] ?? name, reason }));
  const refused = createSession.error ? explain(createSession.error) : undefined;
  const summary = faults.length > 0 || !refused ? faults : [{ label: '', reason: `${refused.happened} ${refused.remedy}` }];
  return (
    <form
      noValidate
      onSubmit={(event) => void handleSubmit((credentials) => createSession.mutate(credentials, { onSuccess: onSignedIn }))(event)}
    >
      <ErrorSummary faults={summary} attempt={formState.submitCount + createSession.failureCount} />
      <div className="grid gap-4">
        <FormField id={fieldId('email')} label="E-mail address" error={errors.email?.message}>
          {(a11y) => <input {...a11y} {...register('email')} type="email" autoComplete="username" className="field" />}
        </FormField>
        <FormField id={fieldId('password')} label="Password" error={errors.password?.message}>
          {(a11y) => <input {...a11y} {...register('password')} type="password" autoComplete="current-password" className="field" />}
        </FormField>
        <button type="submit" className="button" disabled={createSession.isPending}>
          {createSession.isPending ? 'Signing in' : 'Sign in'}
        </button>
      </div>
    </form>
  );
}
