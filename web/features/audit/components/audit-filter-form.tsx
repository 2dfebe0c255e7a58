import type { ReactNode } from 'react';
import { useSearchParams } from 'react-router-dom';
import { AUDIT_WHATS, AUDIT_WORDS } from '../../../../shared/api/audit.js';

const FIELDS = ['who', 'what', 'subject', 'from', 'to'] as const;

/** The filter stands in the address: a link to it shows the same. Its fields are filled from there, anew whenever it changes. */
export function AuditFilterForm() {
  const [query, setQuery] = useSearchParams();
  return (
    <form
      key={query.toString()}
      className="my-4 grid items-end gap-3 wide:grid-cols-[1fr_1.3fr_1fr_170px_170px_auto]"
      onSubmit={(event) => {
        event.preventDefault();
        const form = new FormData(event.currentTarget);
        const given = FIELDS.flatMap((name) => {
          const value = form.get(name);
          return typeof value === 'string' && value.trim() !== '' ? [[name, value.trim()]] : [];
        });
        setQuery(new URLSearchParams(given), { preventScrollReset: true });
      }}
    >
      <Field name="who" label="Who">
        <input
          id="audit-who"
          name="who"
          className="field"
          maxLength={320}
          defaultValue={query.get('who') ?? ''}
          placeholder="name or e-mail"
        />
      </Field>
      <Field name="what" label="What">
        <select id="audit-what" name="what" className="field" defaultValue={query.get('what') ?? ''}>
          <option value="">everything</option>
          {AUDIT_WHATS.map((what) => (
            <option key={what} value={what}>
              {AUDIT_WORDS[what]}
            </option>
          ))}
        </select>
      </Field>
      <Field name="subject" label="To what">
        <input
          id="audit-subject"
          name="subject"
          className="field"
          maxLength={320}
          defaultValue={query.get('subject') ?? ''}
          placeholder="name, tag, unit"
        />
      </Field>
      <Field name="from" label="From">
        <input id="audit-from" name="from" type="date" className="field" defaultValue={query.get('from') ?? ''} />
      </Field>
      <Field name="to" label="To">
        <input id="audit-to" name="to" type="date" className="field" defaultValue={query.get('to') ?? ''} />
      </Field>
      <button type="submit" className="button button-plain">
        Filter
      </button>
    </form>
  );
}

function Field({ name, label, children }: { name: string; label: string; children: ReactNode }) {
  return (
    <div className="min-w-0">
      <label htmlFor={`audit-${name}`} className="font-bold">
        {label}
      </label>
      <div className="mt-1">{children}</div>
    </div>
  );
}
