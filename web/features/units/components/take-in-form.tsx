import { useState } from 'react';
import { zodResolver } from '@hookform/resolvers/zod';
import { useForm, type FieldPath } from 'react-hook-form';
import { Link } from 'react-router-dom';
import { z } from 'zod';
import { applianceSchema, LICENSED_ONLY, newUnitSchema, type NewUnit, type Unit } from '../../../../shared/api/units.js';
import { Caution } from '../../../components/caution.js';
import { ErrorSummary, FormField, type FieldA11y } from '../../../components/form-field.js';
import { explain } from '../../../components/page-states.js';
import { ApiProblem } from '../../../lib/api-problem.js';
import { faultsOf, faultsOfProblem, fieldId } from '../../../lib/form-faults.js';
import { parseMoney, plural, unitNumber } from '../../../lib/format.js';
import { useSubmission } from '../../../lib/submission.js';
import { paths } from '../../../paths.js';
import { useTakeInUnit } from '../api/take-in-unit.js';

type Typed = z.input<typeof newUnitSchema>;

const LABELS: Record<string, string> = {
  appliance: 'Appliance',
  'plate.maker': 'Maker',
  'plate.model': 'Model',
  'plate.serial': 'Serial number',
  'plate.protectionClass': 'Protection class',
  'plate.volts': 'Volts',
  'plate.hertz': 'Hertz',
  'plate.watts': 'Watts',
  'plate.amperes': 'Amperes',
  'plate.massKg': 'Mass in kg',
  family: 'Control family',
  complaint: 'Complaint',
  source: 'Who gave it',
  costMinor: 'What it cost',
  sameSerialReason: 'Why it is taken in again',
};

const REASONS = newUnitSchema.shape.sameSerialReason.unwrap().options;
const textOrNothing = (text: unknown): unknown => (typeof text === 'string' && text.trim() !== '' ? text.trim() : undefined);
const numberOrNothing = (text: unknown): unknown =>
  typeof text === 'string' && text.trim() === '' ? undefined : typeof text === 'string' ? Number(text.trim()) : text;

/** The other units with this serial number, as the refusal names them. */
const sameSerialSchema = z.object({ type: z.string().endsWith('same-serial'), units: z.array(z.number().int()) });

function sameSerialUnits(error: unknown): number[] | undefined {
  if (!(error instanceof ApiProblem)) return undefined;
  const parsed = sameSerialSchema.safeParse(error.problem);
  return parsed.success ? parsed.data.units : undefined;
}

export interface TakeInFormProps {
  sheets: readonly { family: string; title?: string | undefined; appliance?: string | undefined }[];
  currency: string;
  onTakenIn: (unit: Unit) => void;
}

export function TakeInForm({ sheets, currency, onTakenIn }: TakeInFormProps) {
  const takeIn = useTakeInUnit();
  const submissionFor = useSubmission();
  const { register, handleSubmit, formState, watch } = useForm<Typed, unknown, NewUnit>({
    resolver: zodResolver(newUnitSchema),
    defaultValues: {
      appliance: 'washing machine',
      plate: { maker: '', model: '', protectionClass: 'I', plateUnreadable: false },
      complaint: '',
    },
    shouldFocusError: false,
  });
  const [refusals, setRefusals] = useState(0);
  const others = sameSerialUnits(takeIn.error);
  const pointed = faultsOfProblem(takeIn.error);
  const ownFaults = faultsOf(formState.errors);
  const faults = [...ownFaults, ...pointed.filter(({ name }) => !ownFaults.some((own) => own.name === name))];
  const summary = faults.map(({ name, reason }) => ({ id: fieldId(name), label: LABELS[name] ?? name, reason }));
  if (takeIn.error && others === undefined && pointed.length === 0) {
    const { happened, remedy } = explain(takeIn.error);
    summary.push({ id: '', label: '', reason: `${happened} ${remedy}` });
  }

  const send = (unit: NewUnit): void => {
    const { idempotencyKey } = submissionFor(unit);
    takeIn.mutate({ body: unit, idempotencyKey }, { onSuccess: onTakenIn, onError: () => setRefusals((count) => count + 1) });
  };
  const field = (name: FieldPath<Typed>, hint?: string, className = '') => ({
    id: fieldId(name),
    label: LABELS[name] ?? name,
    ...(hint === undefined ? {} : { hint }),
    error: faults.find((fault) => fault.name === name)?.reason,
    className,
  });
  const text = (name: FieldPath<Typed>) => (a11y: FieldA11y) => (
    <input
      {...a11y}
      {...register(name, {
        setValueAs: (typed) => textOrNothing(typed) ?? (name === 'plate.maker' || name === 'plate.model' ? '' : undefined),
      })}
      autoComplete="off"
      className="field"
    />
  );
  const amount = (name: FieldPath<Typed>) => (a11y: FieldA11y) => (
    <input {...a11y} {...register(name, { setValueAs: numberOrNothing })} inputMode="decimal" autoComplete="off" className="field" />
  );
  const licensedOnly = LICENSED_ONLY.some((one) => one === watch('appliance'));

  return (
    <form noValidate onSubmit={(event) => void handleSubmit(send)(event)}>
      <ErrorSummary
        faults={summary.map((fault) => ({ ...fault, id: fault.id === '' ? undefined : fault.id }))}
        attempt={formState.submitCount + refusals}
      />
      <div className="grid items-start gap-x-11 gap-y-7 wide:grid-cols-[1fr_1fr]">
        <fieldset className="rating-plate min-w-0">
          <div className="grid gap-4">
            <legend className="float-left font-read text-[18px] font-bold">Rating plate, as the machine has it</legend>
            <div className="clear-both grid grid-cols-2 gap-4">
              <FormField {...field('plate.maker')}>{text('plate.maker')}</FormField>
              <FormField {...field('plate.model')}>{text('plate.model')}</FormField>
            </div>
            <FormField {...field('plate.serial')}>{text('plate.serial')}</FormField>
            <label className="flex min-h-11 items-center gap-3">
              <input type="checkbox" className="tick" {...register('plate.plateUnreadable')} />
              The plate is unreadable, or gone
            </label>
            <FormField {...field('plate.protectionClass', 'I has an earth pin; II shows a square in a square; III is extra-low voltage.')}>
              {(a11y) => (
                <select {...a11y} {...register('plate.protectionClass')} className="field">
                  <option>I</option>
                  <option>II</option>
                  <option>III</option>
                </select>
              )}
            </FormField>
            <div className="grid grid-cols-2 gap-4">
              <FormField {...field('plate.volts')}>{amount('plate.volts')}</FormField>
              <FormField {...field('plate.hertz')}>{amount('plate.hertz')}</FormField>
              <FormField {...field('plate.watts')}>{amount('plate.watts')}</FormField>
              <FormField {...field('plate.amperes')}>{amount('plate.amperes')}</FormField>
              <FormField {...field('plate.massKg')}>{amount('plate.massKg')}</FormField>
            </div>
          </div>
        </fieldset>
        <div className="grid gap-4">
          <div>
            <FormField {...field('appliance')}>
              {(a11y) => (
                <select {...a11y} {...register('appliance')} className="field">
                  {applianceSchema.options.map((one) => (
                    <option key={one}>{one}</option>
                  ))}
                </select>
              )}
            </FormField>
            <div aria-live="polite" className="[&>*]:mt-3">
              {licensedOnly && (
                <Caution>
                  <p>
                    Gas, sealed refrigerant and microwave ovens are a licensed person’s work. The unit is marked so, and no script runs on
                    it. Do not open it, do not plug it in.
                  </p>
                </Caution>
              )}
            </div>
          </div>
          <FormField {...field('complaint', 'In the words of who gave it: what does it do, what not?')}>
            {(a11y) => <textarea {...a11y} {...register('complaint')} rows={3} className="field" />}
          </FormField>
          <FormField {...field('family', 'What electronics it has, whatever name is on its front. It can stay open.')}>
            {(a11y) => (
              <select {...a11y} {...register('family', { setValueAs: textOrNothing })} className="field">
                <option value="">not known, or no service sheet</option>
                {sheets.map((sheet) => (
                  <option key={sheet.family} value={sheet.family}>
                    {sheet.title ?? sheet.family}
                    {sheet.appliance === undefined ? '' : `, ${sheet.appliance}`}
                  </option>
                ))}
              </select>
            )}
          </FormField>
          <FormField {...field('source')}>{text('source')}</FormField>
          <FormField {...field('costMinor', `In ${currency}, with decimals, such as 12.50. Nothing if it was given.`)}>
            {(a11y) => (
              <input
                {...a11y}
                {...register('costMinor', {
                  setValueAs: (typed: unknown) =>
                    typeof typed === 'string' ? (typed.trim() === '' ? undefined : parseMoney(typed, currency)) : typed,
                })}
                inputMode="decimal"
                autoComplete="off"
                className="field"
              />
            )}
          </FormField>
        </div>
      </div>
      <div aria-live="polite">
        {others !== undefined && (
          <div className="mt-7 border-t-2 border-ink pt-4">
            <h2>This serial number is on the books already</h2>
            <p className="my-2">
              {plural(others.length, 'unit')} with the same serial:{' '}
              {others.map((number, index) => (
                <span key={number}>
                  {index > 0 && ', '}
                  <Link to={paths.unit(number)} target="_blank" rel="noopener">
                    No. {unitNumber(number)} (opens beside this page)
                  </Link>
                </span>
              ))}
              . Say why it is taken in again; the units are linked.
            </p>
            <FormField {...field('sameSerialReason', undefined, 'max-w-[460px]')}>
              {(a11y) => (
                <select {...a11y} {...register('sameSerialReason', { setValueAs: textOrNothing })} className="field">
                  <option value="">choose a reason</option>
                  {REASONS.map((reason) => (
                    <option key={reason}>{reason}</option>
                  ))}
                </select>
              )}
            </FormField>
          </div>
        )}
      </div>
      <button type="submit" className="button mt-7 w-full wide:w-auto" disabled={takeIn.isPending}>
        {takeIn.isPending ? 'Taking it in' : others === undefined ? 'Take it in' : 'Take it in again'}
      </button>
    </form>
  );
}
