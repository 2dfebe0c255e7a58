import { useState } from 'react';
import { withdrawTagSchema } from '../../../../shared/api/tags.js';
import { FormField } from '../../../components/form-field.js';
import { ErrorNote } from '../../../components/page-states.js';
import { fieldId } from '../../../lib/form-faults.js';
import { useWithdrawTag } from '../api/withdraw-tag.js';

/** A lead takes a standing tag back; the buyer's page says so from then on. */
export function WithdrawForm({ unit, tag }: { unit: number; tag: string }) {
  const withdraw = useWithdrawTag(unit, tag);
  const [reason, setReason] = useState('');
  const [fault, setFault] = useState<string>();
  return (
    <details className="mt-5 border-t border-line">
      <summary className="flex min-h-11 cursor-pointer items-center text-rim underline">Withdraw this tag</summary>
      <form
        noValidate
        className="grid gap-3 pb-3"
        onSubmit={(event) => {
          event.preventDefault();
          const parsed = withdrawTagSchema.safeParse({ reason });
          setFault(parsed.error?.issues[0]?.message);
          if (parsed.success) withdraw.mutate(parsed.data.reason);
        }}
      >
        <FormField
          id={fieldId('withdraw-reason')}
          label="Why it no longer stands"
          hint="Kept in the unit’s history. It cannot be taken back: the unit must be signed off again."
          error={fault}
        >
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
        {withdraw.error && <ErrorNote error={withdraw.error} />}
        <button type="submit" className="button button-plain" disabled={withdraw.isPending}>
          Withdraw the tag
        </button>
      </form>
    </details>
  );
}
