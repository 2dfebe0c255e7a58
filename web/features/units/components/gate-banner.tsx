import { useState } from 'react';
import { overrideSchema } from '../../../../shared/api/units.js';
import type { GateState } from '../../../../shared/readiness/gates.js';
import { Caution } from '../../../components/caution.js';
import { FormField } from '../../../components/form-field.js';
import { ErrorNote } from '../../../components/page-states.js';
import { fieldId } from '../../../lib/form-faults.js';
import { useSubmission } from '../../../lib/submission.js';
import { useRecordOverride } from '../api/record-override.js';

const sentence = (reasons: readonly string[]): string =>
  reasons.map((reason, index) => (index === 0 ? reason.charAt(0).toUpperCase() + reason.slice(1) : reason)).join('; ');

/** Why the machine may not be put on mains, and the way through; or that a lead opened the gate in spite of it. */
export function GateBanner({ gate, number, mayOverride }: { gate: GateState; number: number; mayOverride: boolean }) {
  if (gate.open && !gate.override) return null;
  if (gate.override) {
    return (
      <Caution className="mt-5" word="Gate overridden">
        <p>
          {sentence(gate.reasons)}. {gate.override.by} opened the gate all the same: “{gate.override.reason}”
        </p>
      </Caution>
    );
  }
  // A machine for a licensed person only is never energised, override or not: its gate names no dead test.
  const overridable = mayOverride && gate.remedy?.includes('overrides') === true;
  return (
    <div className="mt-5">
      <Caution word="Not on mains">
        <p>
          <b>Don’t put it on mains.</b> {sentence(gate.reasons)}.
        </p>
        {gate.remedy !== undefined && <p>{sentence([gate.remedy])}.</p>}
      </Caution>
      {overridable && <OverrideForm number={number} />}
    </div>
  );
}

function OverrideForm({ number }: { number: number }) {
  const override = useRecordOverride(number);
  const submissionFor = useSubmission();
  const [reason, setReason] = useState('');
  const [fault, setFault] = useState<string>();
  return (
    <details className="border-b border-line">
      <summary className="flex min-h-11 cursor-pointer items-center text-rim underline">Open the gate with a reason</summary>
      <form
        noValidate
        className="grid max-w-[640px] gap-3 pb-4"
        onSubmit={(event) => {
          event.preventDefault();
          const parsed = overrideSchema.safeParse({ gate: 'dead tests', reason });
          setFault(parsed.error?.issues[0]?.message);
          if (!parsed.success) return;
          const { idempotencyKey } = submissionFor(parsed.data);
          override.mutate({ body: parsed.data, idempotencyKey });
        }}
      >
        <FormField
          id={fieldId('override-reason')}
          label="Why it may be energised before its dead tests passed"
          hint="It is kept in the history under your name."
          error={fault}
        >
          {(a11y) => (
            <textarea
              {...a11y}
              rows={2}
              maxLength={2000}
              className="field"
              value={reason}
              onChange={(event) => setReason(event.target.value)}
            />
          )}
        </FormField>
        {override.error && <ErrorNote error={override.error} />}
        <button type="submit" className="button button-plain justify-self-start" disabled={override.isPending}>
          Open the gate
        </button>
      </form>
    </details>
  );
}
