import { AUDIT_WORDS, type AuditRow } from '../../../../shared/api/audit.js';
import { formatDay, formatDayTime, formatTime } from '../../../lib/format.js';

/** Newest first, a day at a time; each change with what it was before and is after. */
export function AuditList({ rows }: { rows: readonly AuditRow[] }) {
  const days = new Map<string, AuditRow[]>();
  for (const row of rows) days.set(formatDay(row.at), [...(days.get(formatDay(row.at)) ?? []), row]);
  return [...days].map(([day, ofDay]) => (
    <section key={day} aria-label={day} className="mb-6">
      <h2 className="section-heading">{day}</h2>
      <ol>
        {ofDay.map((row) => (
          <li key={row.id} className="grid gap-x-6 gap-y-1 border-b border-line py-2 wide:grid-cols-[66px_1fr_1fr]">
            <time dateTime={row.at}>{formatTime(row.at)}</time>
            <p>
              <b>{row.who?.name ?? 'Nobody signed in'}</b> {AUDIT_WORDS[row.what]}: {row.subject.name}
            </p>
            <Changes row={row} />
          </li>
        ))}
      </ol>
    </section>
  ));
}

const MOMENT = /^\d{4}-\d\d-\d\dT[\d:.]+Z$/;
function valueText(value: unknown): string {
  if (typeof value === 'boolean') return value ? 'yes' : 'no';
  if (typeof value !== 'string') return JSON.stringify(value);
  return MOMENT.test(value) ? formatDayTime(value) : value;
}
/** `linkExpiresAt` is "link expires at". */
const nameText = (name: string): string => name.replace(/[A-Z]/g, (letter) => ` ${letter.toLowerCase()}`);

function Changes({ row: { before = {}, after = {} } }: { row: AuditRow }) {
  const names = [...new Set([...Object.keys(before), ...Object.keys(after)])];
  if (names.length === 0) return null;
  return (
    <dl className="grid content-start grid-cols-[max-content_minmax(0,1fr)] gap-x-3 text-[15px]">
      {names.map((name) => (
        <div key={name} className="contents">
          <dt className="lab">{nameText(name)}</dt>
          <dd className="break-words">
            {name in before && (
              <>
                <del className="text-ink2">
                  <span className="sr-only">before: </span>
                  {valueText(before[name])}
                </del>{' '}
              </>
            )}
            {name in after && (
              <ins className="no-underline">
                <span className="sr-only">{name in before ? 'after: ' : ''}</span>
                {valueText(after[name])}
              </ins>
            )}
          </dd>
        </div>
      ))}
    </dl>
  );
}
