import { useState, type ReactNode } from 'react';
import { fieldId } from '../lib/form-faults.js';
import { FormField } from './form-field.js';
import { ErrorNote } from './page-states.js';

interface ReasonFormProps {
  /** What is done; also what unfolds the form. */
  summary: string;
  label: string;
  hint: string;
  button: string;
  maxLength: number;
  /** The reason as the API takes it, with its fault in words. */
  schema: { safeParse(value: { reason: string }): { error?: { issues: { message: string }[] } | undefined } };
  sending: { isPending: boolean; error: Error | null };
  send: (reason: string) => void;
  className?: string;
  /** What it means, before it is done. */
  children?: ReactNode;
}

/** Something that is not done without saying why: folded until it is wanted, sent only with a reason. */
export function ReasonForm({ summary, label, hint, button, maxLength, schema, sending, send, className = '', children }: ReasonFormProps) {
  const [reason, setReason] = useState('');
  const [fault, setFault] = useState<string>();
  return (
    <details className={className}>
      <summary className="flex min-h-11 cursor-pointer items-center text-rim underline">{summary}</summary>
      <form
        noValidate
        className="grid max-w-[640px] gap-3 pb-4"
        onSubmit={(event) => {
          event.preventDefault();
          const { error } = schema.safeParse({ reason });
          setFault(error?.issues[0]?.message);
          if (!error) send(reason);
        }}
      >
        {children}
        <FormField id={fieldId('reason')} label={label} hint={hint} error={fault}>
          {(a11y) => (
            <textarea
              {...a11y}
              rows={2}
              maxLength={maxLength}
              className="field"
              value={reason}
              onChange={(event) => setReason(event.target.value)}
            />
          )}
        </FormField>
        {sending.error && <ErrorNote error={sending.error} />}
        <button type="submit" className="button button-plain justify-self-start" disabled={sending.isPending}>
          {button}
        </button>
      </form>
    </details>
  );
}
