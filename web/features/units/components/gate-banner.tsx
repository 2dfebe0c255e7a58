import { overrideSchema } from '../../../../shared/api/units.js';
import type { GateState } from '../../../../shared/readiness/gates.js';
import { Caution } from '../../../components/caution.js';
import { ReasonForm } from '../../../components/reason-form.js';
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
  return (
    <ReasonForm
      className="border-b border-line"
      summary="Open the gate with a reason"
      label="Why it may be energised before its dead tests passed"
      hint="It is kept in the history under your name."
      button="Open the gate"
      maxLength={2000}
      schema={overrideSchema.pick({ reason: true })}
      sending={override}
      send={(reason) => {
        const body = { gate: 'dead tests', reason } as const;
        override.mutate({ body, idempotencyKey: submissionFor(body).idempotencyKey });
      }}
    />
  );
}
