import { useEffect, useRef, type ReactNode } from 'react';

export interface FieldA11y {
  id: string;
  'aria-invalid': boolean;
  'aria-describedby': string | undefined;
}

/** A label, what to type, the field, and beside it what is wrong with it. */
export function FormField({
  id,
  label,
  hint,
  error,
  children,
  className = '',
}: {
  id: string;
  label: string;
  hint?: ReactNode;
  error?: string | undefined;
  children: (a11y: FieldA11y) => ReactNode;
  className?: string;
}) {
  const describedBy = [hint === undefined ? '' : `${id}-hint`, error === undefined ? '' : `${id}-error`].filter(Boolean).join(' ');
  return (
    <div className={className}>
      <label htmlFor={id} className="font-bold">
        {label}
      </label>
      {hint !== undefined && (
        <p id={`${id}-hint`} className="text-[15px] text-ink2">
          {hint}
        </p>
      )}
      <div className="mt-1">{children({ id, 'aria-invalid': error !== undefined, 'aria-describedby': describedBy || undefined })}</div>
      {error !== undefined && (
        <p id={`${id}-error`} className="mt-1 font-bold text-fail">
          {error}
        </p>
      )}
    </div>
  );
}

export interface FieldFault {
  /** The field's element id; none for a fault of the whole. */
  id?: string | undefined;
  label: string;
  reason: string;
}

/** Every fault of a form in one place, each a link to its field; takes the focus when it appears or changes. */
export function ErrorSummary({ faults, attempt }: { faults: readonly FieldFault[]; attempt: number }) {
  const box = useRef<HTMLDivElement>(null);
  useEffect(() => {
    if (faults.length > 0) box.current?.focus();
    // Once per attempt to send: not while a fault is being mended.
  }, [attempt, faults.length === 0]);
  if (faults.length === 0) return null;
  return (
    <div ref={box} role="alert" tabIndex={-1} className="mb-5 border-2 border-fail bg-fail-ground px-4 py-3">
      <p className="font-bold">
        {faults.length === 1 ? 'One thing is missing or wrong.' : `${faults.length} things are missing or wrong.`}
      </p>
      <ul className="mt-1">
        {faults.map((fault) => (
          <li key={`${fault.id ?? ''} ${fault.reason}`}>
            {fault.id === undefined ? (
              fault.reason
            ) : (
              <a
                className="tap"
                href={`#${fault.id}`}
                onClick={(event) => {
                  event.preventDefault();
                  document.getElementById(fault.id ?? '')?.focus();
                }}
              >
                {fault.label}: {fault.reason}
              </a>
            )}
          </li>
        ))}
      </ul>
    </div>
  );
}
