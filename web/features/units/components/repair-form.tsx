import { useEffect, useRef, useState } from 'react';
import { zodResolver } from '@hookform/resolvers/zod';
import { useForm } from 'react-hook-form';
import { z } from 'zod';
import { repairBodySchema, type RepairBody } from '../../../../shared/history/events.js';
import { ErrorSummary, FormField } from '../../../components/form-field.js';
import { explain } from '../../../components/page-states.js';
import { faultsOf, fieldId } from '../../../lib/form-faults.js';
import { parseMoney } from '../../../lib/format.js';
import { useSubmission } from '../../../lib/submission.js';
import { useRecordRepair } from '../api/record-repair.js';

const wholeNumber = (reason: string) => z.string().trim().regex(/^\d+$/, reason).transform(Number);

/** What is typed, turned into the message that the terminal sends as well. */
const formSchema = (currency: string) =>
  z
    .object({
      part: z.string().trim().min(1, 'say what was mended'),
      source: z.enum(['new', 'used', 'none']),
      fromUnit: z.string().trim(),
      minutes: wholeNumber('type the minutes as a whole number'),
      cost: z
        .string()
        .trim()
        .refine((typed) => typed === '' || !Number.isNaN(parseMoney(typed, currency)), 'type an amount such as 6.00'),
      note: z.string().trim(),
    })
    // Asked even where another field is at fault, so that every fault is named at once.
    .refine(({ source, fromUnit }) => source !== 'used' || /^0*[1-9]\d{0,8}$/.test(fromUnit), {
      path: ['fromUnit'],
      message: 'type the number of the unit it came from',
      when: () => true,
    })
    .transform(({ part, source, fromUnit, minutes, cost, note }): RepairBody => {
      const partSource: RepairBody['partSource'] = source === 'used' ? { kind: 'used', fromUnit: Number(fromUnit) } : { kind: source };
      const costMinor = source === 'none' || cost === '' ? 0 : parseMoney(cost, currency);
      return { part, partSource, minutes, costMinor, ...(note === '' ? {} : { note }) };
    })
    .pipe(repairBodySchema);

const LABELS: Record<string, string> = {
  part: 'Part, or what was done',
  source: 'Where the part came from',
  fromUnit: 'From unit number',
  minutes: 'Minutes',
  cost: 'What the part cost',
  note: 'Note',
};
const SOURCES = [
  ['new', 'a new part'],
  ['used', 'a used part'],
  ['none', 'no part was changed'],
] as const;

export function RepairForm({
  number,
  parts,
  currency,
  onDone,
}: {
  number: number;
  parts: readonly string[];
  currency: string;
  onDone: () => void;
}) {
  const record = useRecordRepair(number);
  const submissionFor = useSubmission();
  const heading = useRef<HTMLHeadingElement>(null);
  useEffect(() => heading.current?.focus(), []);
  const [schema] = useState(() => formSchema(currency));
  const { register, handleSubmit, formState, watch } = useForm<z.input<typeof schema>, unknown, RepairBody>({
    resolver: zodResolver(schema),
    defaultValues: { part: '', source: 'new', fromUnit: '', minutes: '', cost: '', note: '' },
    shouldFocusError: false,
  });
  const { errors } = formState;
  const faults: { id?: string; label: string; reason: string }[] = faultsOf(errors).map(({ name, reason }) => ({
    id: fieldId(name),
    label: LABELS[name] ?? name,
    reason,
  }));
  if (record.error) {
    const { happened, remedy } = explain(record.error);
    faults.push({ label: '', reason: `${happened} ${remedy}` });
  }
  const send = (repair: RepairBody): void => {
    const { idempotencyKey, id, at } = submissionFor(repair);
    record.mutate({ body: { id, at, repair }, idempotencyKey }, { onSuccess: onDone });
  };
  const field = (name: keyof z.input<typeof schema>) => ({
    id: fieldId(name),
    label: name === 'cost' ? `${LABELS[name]}, ${currency}` : (LABELS[name] ?? name),
    error: errors[name]?.message,
  });
  const source = watch('source');

  return (
    <form noValidate aria-labelledby="repair-heading" className="mt-6 max-w-[760px]" onSubmit={(event) => void handleSubmit(send)(event)}>
      <h2 ref={heading} id="repair-heading" tabIndex={-1} className="section-heading mb-4">
        Record a repair
      </h2>
      <ErrorSummary faults={faults} attempt={formState.submitCount + record.failureCount} />
      <div className="grid gap-4 wide:grid-cols-2">
        <FormField {...field('part')}>
          {(a11y) => <input {...a11y} {...register('part')} list="parts-of-sheet" autoComplete="off" className="field" />}
        </FormField>
        <datalist id="parts-of-sheet">
          {parts.map((part) => (
            <option key={part} value={part} />
          ))}
        </datalist>
        <FormField {...field('source')}>
          {(a11y) => (
            <select {...a11y} {...register('source')} className="field">
              {SOURCES.map(([value, label]) => (
                <option key={value} value={value}>
                  {label}
                </option>
              ))}
            </select>
          )}
        </FormField>
        {source === 'used' && (
          <FormField {...field('fromUnit')}>
            {(a11y) => <input {...a11y} {...register('fromUnit')} inputMode="numeric" autoComplete="off" className="field" />}
          </FormField>
        )}
        <FormField {...field('minutes')}>
          {(a11y) => <input {...a11y} {...register('minutes')} inputMode="numeric" autoComplete="off" className="field" />}
        </FormField>
        {source !== 'none' && (
          <FormField {...field('cost')}>
            {(a11y) => <input {...a11y} {...register('cost')} inputMode="decimal" autoComplete="off" className="field" />}
          </FormField>
        )}
        <FormField {...field('note')}>
          {(a11y) => <input {...a11y} {...register('note')} maxLength={2000} autoComplete="off" className="field" />}
        </FormField>
      </div>
      <p className="mt-4 text-ink2">
        What was measured before the repair no longer counts for readiness, and the dead tests are due again before the machine goes on
        mains.
      </p>
      <div className="mt-4 flex flex-wrap gap-3">
        <button type="submit" className="button" disabled={record.isPending}>
          {record.isPending ? 'Recording' : 'Record the repair'}
        </button>
        <button type="button" className="button button-plain" onClick={onDone}>
          Not now
        </button>
      </div>
    </form>
  );
}
