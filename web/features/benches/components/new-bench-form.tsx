import { zodResolver } from '@hookform/resolvers/zod';
import { useForm } from 'react-hook-form';
import { newBenchSchema } from '../../../../shared/api/benches.js';
import { FormField } from '../../../components/form-field.js';
import { ErrorNote } from '../../../components/page-states.js';
import { faultsOfProblem, fieldId } from '../../../lib/form-faults.js';
import { useCreateBench } from '../api/change-bench.js';

export function NewBenchForm({ onMade }: { onMade: (made: { name: string; token: string }) => void }) {
  const create = useCreateBench();
  const { register, handleSubmit, formState, reset } = useForm({ resolver: zodResolver(newBenchSchema), defaultValues: { name: '' } });
  const pointed = faultsOfProblem(create.error).find(({ name }) => name === 'name')?.reason;
  return (
    <form
      noValidate
      className="flex max-w-[560px] flex-wrap items-end gap-3"
      onSubmit={(event) =>
        void handleSubmit(({ name }) =>
          create.mutate(name, {
            onSuccess: ({ bench, token }) => {
              reset();
              onMade({ name: bench.name, token });
            },
          }),
        )(event)
      }
    >
      <FormField
        id={fieldId('bench-name')}
        label="Name of the bench"
        hint="As people call it, like bench 2 or window bench."
        error={formState.errors.name?.message ?? pointed}
        className="min-w-56 grow"
      >
        {(a11y) => <input {...a11y} {...register('name')} maxLength={60} autoComplete="off" className="field" />}
      </FormField>
      <button type="submit" className="button" disabled={create.isPending}>
        {create.isPending ? 'Making it' : 'Make a bench'}
      </button>
      {create.error && pointed === undefined && (
        <div className="w-full">
          <ErrorNote error={create.error} />
        </div>
      )}
    </form>
  );
}
