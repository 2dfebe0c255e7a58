import { zodResolver } from '@hookform/resolvers/zod';
import { useForm } from 'react-hook-form';
import { z } from 'zod';
import { ErrorSummary, FormField } from '../../../components/form-field.js';
import { faultsOf, fieldId } from '../../../lib/form-faults.js';

const lookUpSchema = z.object({
  tag: z
    .string()
    .trim()
    .regex(/^\d{4,10}-\d{1,4}$/, 'type it as it stands on the tag, such as 0412-2'),
  word: z
    .string()
    .trim()
    .toUpperCase()
    .regex(/^[A-Z0-9]{4}$/, 'four letters or digits, such as 7QKF'),
});
const LABELS = { tag: 'Tag number', word: 'Word' };

export function LookUpForm({ tag, onAsked }: { tag: string; onAsked: (asked: { tag: string; word: string }) => void }) {
  const { register, handleSubmit, formState } = useForm({
    resolver: zodResolver(lookUpSchema),
    defaultValues: { tag, word: '' },
    shouldFocusError: false,
  });
  const { errors } = formState;
  const faults = faultsOf(errors).map(({ name, reason }) => ({ id: fieldId(name), label: LABELS[name as keyof typeof LABELS], reason }));
  return (
    <form noValidate className="grid gap-4" onSubmit={(event) => void handleSubmit(onAsked)(event)}>
      <ErrorSummary faults={faults} attempt={formState.submitCount} />
      <FormField id={fieldId('tag')} label={LABELS.tag} error={errors.tag?.message}>
        {(a11y) => <input {...a11y} {...register('tag')} autoComplete="off" placeholder="0412-2" className="field" />}
      </FormField>
      <FormField id={fieldId('word')} label={LABELS.word} error={errors.word?.message}>
        {(a11y) => (
          <input
            {...a11y}
            {...register('word')}
            autoComplete="off"
            autoCapitalize="characters"
            maxLength={8}
            placeholder="7QKF"
            className="field"
          />
        )}
      </FormField>
      <button type="submit" className="button min-h-14">
        Look it up
      </button>
    </form>
  );
}
