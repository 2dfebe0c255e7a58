import { stringify } from 'csv-stringify/sync';
import type { AuditRow } from '../../../shared/api/audit.js';

const COLUMNS = ['number', 'at', 'who', 'who_role', 'who_id', 'what', 'subject_kind', 'subject', 'subject_id', 'before', 'after'];

const recordOf = ({ id, at, who, what, subject, before, after }: AuditRow): string[] => [
  String(id),
  at,
  who?.name ?? '',
  who?.role ?? '',
  who?.id ?? '',
  what,
  subject.kind,
  subject.name,
  subject.id,
  before === undefined ? '' : JSON.stringify(before),
  after === undefined ? '' : JSON.stringify(after),
];

/** RFC 4180, a piece for each handful of rows. What a spreadsheet would take for a formula gets a quote before it, as a name can be one. */
export async function* csvOf(rows: AsyncIterable<AuditRow[]>): AsyncGenerator<string, void> {
  yield stringify([COLUMNS], { record_delimiter: '\r\n' });
  for await (const some of rows) yield stringify(some.map(recordOf), { record_delimiter: '\r\n', escape_formulas: true });
}
