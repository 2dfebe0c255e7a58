import { zodResolver } from '@hookform/resolvers/zod';
import { useQuery } from '@tanstack/react-query';
import { useForm } from 'react-hook-form';
import { ownPinSchema } from '../../../../shared/api/benches.js';
import { ErrorSummary, FormField } from '../../../components/form-field.js';
import { ErrorNote, explain, Pending } from '../../../components/page-states.js';
import { faultsOf, faultsOfProblem, fieldId } from '../../../lib/form-faults.js';
import { ownPinQuery, useSetOwnPin } from '../api/own-pin.js';
import { pinWords } from './pin-list.js';

const LABELS: Record<string, string> = { password: 'Your password', pin: 'New PIN' };

/** The own PIN for shared benches, for the account page: a section of its own, with its heading and what it needs. */
export function MyPin() {
  const state = useQuery(ownPinQuery);
  return (
    <section aria-labelledby="my-pin" className="max-w-[560px]">
      <h2 id="my-pin" className="section-heading">
        PIN for shared benches
      </h2>
      {state.isPending && <Pending what="your PIN’s state" />}
      {state.isError && <ErrorNote error={state.error} retry={() => void state.refetch()} />}
      {state.data && (
        <>
          <p className="mb-3">
            {state.data.pinSetAt === undefined ? 'You have no PIN, so you can’t sign on at a shared bench.' : `${pinWords(state.data)}.`} A
            PIN works only at a bench of the shop, never here.
          </p>
          <MyPinForm />
        </>
      )}
    </section>
  );
}

function MyPinForm() {
  const setOwnPin = useSetOwnPin();
  const { register, handleSubmit, formState, reset } = useForm({
    resolver: zodResolver(ownPinSchema),
    defaultValues: { password: '', pin: '' },
    shouldFocusError: false,
  });
  const pointed = faultsOfProblem(setOwnPin.error);
  const named = [...faultsOf(formState.errors), ...pointed];
  const faults = named.map(({ name, reason }) => ({ id: fieldId(`own-${name}`), label: LABELS[name] ?? name, reason }));
  const refused = setOwnPin.error && pointed.length === 0 ? explain(setOwnPin.error) : undefined;
  const summary = faults.length > 0 || !refused ? faults : [{ label: '', reason: `${refused.happened} ${refused.remedy}` }];
  const errorOf = (name: string): string | undefined => named.find((fault) => fault.name === name)?.reason;
  return (
    <form noValidate onSubmit={(event) => void handleSubmit((body) => setOwnPin.mutate(body, { onSuccess: () => reset() }))(event)}>
      <ErrorSummary faults={summary} attempt={formState.submitCount + setOwnPin.failureCount} />
      <div className="grid gap-4">
        <FormField
          id={fieldId('own-pin')}
          label="New PIN"
          hint="4 to 8 digits that nobody sees you type anywhere else."
          error={errorOf('pin')}
        >
          {(a11y) => (
            <input
              {...a11y}
              {...register('pin')}
              type="password"
              inputMode="numeric"
              autoComplete="off"
              maxLength={8}
              className="field max-w-56 font-mono"
            />
          )}
        </FormField>
        <FormField
          id={fieldId('own-password')}
          label="Your password"
          hint="So that nobody sets it at a screen you left."
          error={errorOf('password')}
        >
          {(a11y) => <input {...a11y} {...register('password')} type="password" autoComplete="current-password" className="field" />}
        </FormField>
        <div>
          <button type="submit" className="button" disabled={setOwnPin.isPending}>
            {setOwnPin.isPending ? 'Setting the PIN' : 'Set my PIN'}
          </button>
          <p role="status" className="mt-2">
            {setOwnPin.isSuccess ? 'Your PIN is set. Benches know it at their next contact.' : ''}
          </p>
        </div>
      </div>
    </form>
  );
}
