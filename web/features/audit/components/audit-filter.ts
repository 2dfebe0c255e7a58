import { AUDIT_WHATS, type AuditFilter } from '../../../../shared/api/audit.js';

const DAY = /^(\d{4})-(\d\d)-(\d\d)$/;

/** A day of the address by the reader's clock: its begin, or with `daysLater` 1 its end. Undefined where there stands no day. */
function moment(day: string | null, daysLater: number): string | undefined {
  const parts = DAY.exec(day ?? '');
  if (!parts) return undefined;
  const at = new Date(Number(parts[1]), Number(parts[2]) - 1, Number(parts[3]) + daysLater);
  return Number.isNaN(at.getTime()) ? undefined : at.toISOString();
}

/** What the address asks of the log; what it says wrongly is left out. */
export function filterInAddress(query: URLSearchParams): AuditFilter {
  const what = AUDIT_WHATS.find((one) => one === query.get('what'));
  const [who, subject] = [query.get('who')?.trim(), query.get('subject')?.trim()];
  const [from, to] = [moment(query.get('from'), 0), moment(query.get('to'), 1)];
  return {
    ...(who ? { who } : {}),
    ...(what ? { what } : {}),
    ...(subject ? { subject } : {}),
    ...(from ? { from } : {}),
    ...(to ? { to } : {}),
  };
}
