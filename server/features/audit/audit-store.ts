import { z } from 'zod';
import { auditRowSchema, type AuditFilter, type AuditRow } from '../../../shared/api/audit.js';
import type { Db } from '../../db.js';

const rowSchema = z
  .object({
    position: z.number(),
    at: z.date(),
    who_id: z.string().nullable(),
    who_name: z.string().nullable(),
    who_role: z.string().nullable(),
    what: z.string(),
    subject_kind: z.string(),
    subject_id: z.string(),
    subject_name: z.string(),
    before: z.unknown(),
    after: z.unknown(),
  })
  .transform((row): AuditRow =>
    auditRowSchema.parse({
      id: row.position,
      at: row.at.toISOString(),
      ...(row.who_id === null ? {} : { who: { id: row.who_id, name: row.who_name, role: row.who_role } }),
      what: row.what,
      subject: { kind: row.subject_kind, id: row.subject_id, name: row.subject_name },
      ...(row.before === null ? {} : { before: row.before }),
      ...(row.after === null ? {} : { after: row.after }),
    }),
  );

/** A text as a pattern that means only itself. */
const containing = (text: string): string => `%${text.replace(/[\\%_]/g, String.raw`\$&`)}%`;
const isUuid = (text: string): boolean => z.uuid().safeParse(text).success;

function filtered(db: Db, { who, what, subject, from, to }: AuditFilter) {
  const query = db('audit_log');
  if (who !== undefined) {
    if (isUuid(who)) void query.where({ who_id: who });
    else {
      const email = who.trim().toLowerCase();
      void query.where((either) => {
        void either
          .whereILike('who_name', containing(who.trim()))
          .orWhereIn('who_id', db('people').select('id').where({ email_key: email }));
      });
    }
  }
  if (what !== undefined) void query.where({ what });
  if (subject !== undefined) {
    const text = subject.trim();
    void query.where((either) => {
      void either.where({ subject_kind: text }).orWhere({ subject_id: text }).orWhereILike('subject_name', containing(text));
    });
  }
  if (from !== undefined) void query.where('at', '>=', new Date(from));
  if (to !== undefined) void query.where('at', '<', new Date(to));
  return query;
}

/** Newest first, from before `before`. */
export async function listAudit(db: Db, filter: AuditFilter, page: { before: number | undefined; limit: number }): Promise<AuditRow[]> {
  const query = filtered(db, filter).orderBy('position', 'desc').limit(page.limit);
  if (page.before !== undefined) void query.where('position', '<', page.before);
  return z.array(rowSchema).parse(await query);
}

/** How many rows are held at a time, however long the log is. */
const ROWS_AT_A_TIME = 1000;

/** Every row up to now, oldest first, some at a time; no transaction is held open for it, for the log only grows. */
export async function* readAudit(db: Db, filter: AuditFilter): AsyncGenerator<AuditRow[], void> {
  const { last } = z.object({ last: z.number().nullable() }).parse(await db('audit_log').max('position as last').first());
  let after = 0;
  while (last !== null && after < last) {
    const query = filtered(db, filter).where('position', '>', after).where('position', '<=', last);
    const rows = z.array(rowSchema).parse(await query.orderBy('position').limit(ROWS_AT_A_TIME));
    yield rows;
    if (rows.length < ROWS_AT_A_TIME) return;
    after = rows.at(-1)?.id ?? last;
  }
}
