import { zodResolver } from '@hookform/resolvers/zod';
import { useForm } from 'react-hook-form';
import { firstAdminSchema } from '../../../../shared/api/sessions.js';
import { ErrorSummary, FormField } from '../../../components/form-field.js';
import { explain } from '../../../components/page-states.js';
import { faultsOf, faultsOfProblem, fieldId } from '../../../lib/form-faults.js';
import { useCreateFirstAdmin } from '../api/create-first-admin.js';

const LABELS: Record<string, string> = { name: 'Name', email: 'E-mail address', password: 'Password' };

export function FirstAdminForm({ token, onMade }: { token: string; onMade: (name: string) => void }) {
  const createFirstAdmin = useCreateFirstAdmin();
  const { register, handleSubmit, formState } = useForm({
    resolver: zodResolver(firstAdminSchema),
    defaultValues: { token, name: '', email: '', password: '' },
    shouldFocusError: false,
  });
  const { errors } = formState;
  const pointed = faultsOfProblem(createFirstAdmin.error);
  const faults = [...faultsOf(errors), ...pointed].map(({ name, reason }) => ({ id: fieldId(name), label: LABELS[name] ?? name, reason }));
  const refused = createFirstAdmin.error && pointed.length === 0 ? explain(createFirstAdmin.error) : undefined;
  const summary = faults.length > 0 || !refused ? faults : [{ label: '', reason: `${refused.happened} ${refused.remedy}` }];
  const errorOf = (name: 'name' | 'email' | 'password'): string | undefined =>
    errors[name]?.message ?? pointed.find((fault) => fault.name === name)?.reason;
  return (
    <form
      noValidate
      onSubmit={(event) =>
        void handleSubmit((body) => createFirstAdmin.mutate(body, { onSuccess: (person) => onMade(person.name) }))(event)
      }
    >
      <ErrorSummary faults={summary} attempt={formState.submitCount + createFirstAdmin.failureCount} />
      <div className="grid gap-4">
        <FormField id={fieldId('name')} label="Name" error={errorOf('name')}>
          {(a11y) => <input {...a11y} {...register('name')} autoComplete="name" className="field" />}
        </FormField>
        <FormField id={fieldId('email')} label="E-mail address" error={errorOf('email')}>
          {(a11y) => <input {...a11y} {...register('email')} type="email" autoComplete="username" className="field" />}
        </FormField>
        <FormField
          id={fieldId('password')}
          label="Password"
          hint="At least 12 characters; a few words are easier to keep than signs."
          error={errorOf('password')}
        >
          {(a11y) => <input {...a11y} {...register('password')} type="password" autoComplete="new-password" className="field" />}
        </FormField>
        <button type="submit" className="button" disabled={createFirstAdmin.isPending}>
          {createFirstAdmin.isPending ? 'Making the admin' : 'Make the admin'}
        </button>
      </div>
    </form>
  );
}
