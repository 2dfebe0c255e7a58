import type { AuditSubject, AuditValues, AuditWhat } from '../../shared/api/audit.js';
import type { PersonRef } from '../../shared/history/events.js';
import type { Db } from '../db.js';

export interface AuditEntry {
  /** Undefined: nobody was signed in. */
  who: PersonRef | undefined;
  what: AuditWhat;
  subject: AuditSubject;
  /** Only what changed, in plain values. Never a secret, nor the hash of one. */
  before?: AuditValues | undefined;
  after?: AuditValues | undefined;
  at: Date;
}

/** A person as a subject. */
export const personSubject = ({ id, name }: Pick<PersonRef, 'id' | 'name'>) => ({ kind: 'person', id, name }) as const;

/** Puts a change down in the transaction that makes it: both are there, or neither is. */
export async function audit(trx: Db, { who, what, subject, before, after, at }: AuditEntry): Promise<void> {
  refuseSecrets({ before, after });
  await trx('audit_log').insert({
    at,
    who_id: who?.id,
    who_name: who?.name,
    who_role: who?.role,
    what,
    subject_kind: subject.kind,
    subject_id: subject.id,
    subject_name: subject.name,
    before: before === undefined ? null : JSON.stringify(before),
    after: after === undefined ? null : JSON.stringify(after),
  });
}

const SECRET_NAME = /^(password|pin|token|hash|secret|verifier|jws|link|url)$|(password|pin|token|hash|secret|verifier)$/i;
/** An argon2 hash, or 256 bits as our tokens and their hashes are written. */
const SECRET_TEXT = /\$argon2|^[\w-]{43}$|^[0-9a-f]{64}$/i;

/** What people type may look like anything; none of it is ours to keep secret. */
const TYPED = /^(reason|name)$/;

/** A secret in the log could never be taken out again, so it must not get in: a fault of the caller, found by its first test. */
function refuseSecrets(values: unknown, name = ''): void {
  if (values === undefined || values === null || typeof values === 'boolean' || typeof values === 'number') return;
  if (SECRET_NAME.test(name)) throw new Error(`The audit log takes no secrets: ${name}.`);
  if (typeof values === 'string') {
    if (!TYPED.test(name) && SECRET_TEXT.test(values))
      throw new Error(`The audit log takes no secrets: the text in ${name} looks like one.`);
  } else for (const [key, value] of Object.entries(values)) refuseSecrets(value, key);
}
