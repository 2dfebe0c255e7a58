import { v7 as newId } from 'uuid';
import type { User } from '../../../shared/api/sessions.js';
import { readSheet } from '../../../shared/sheet/read-sheet.js';
import type { Db } from '../../db.js';
import { ConflictError } from '../../errors.js';
import { audit } from '../../history/audit.js';
import { atPointer } from '../../history/at-pointer.js';
import { refOf } from '../../history/unit-history.js';
import { editionsOf, insertSheet, lockFamily, type StoredSheet } from '../../history/sheet-store.js';
import { refuseWhatIsNoText } from '../../request-faults.js';

/** Editions are never changed: a correction is the next one. */
export async function addSheet(db: Db, text: string, person: User, now: Date): Promise<StoredSheet> {
  const sheet = atPointer('/text', () => readSheet(text));
  refuseWhatIsNoText(sheet, '/text');
  await lockFamily(db, sheet.family);
  const next = ((await editionsOf(db, sheet.family)).at(-1) ?? 0) + 1;
  if (sheet.edition !== next) {
    throw new ConflictError(
      next === 1
        ? `There is no sheet for ${sheet.family} yet, so this one must be edition 1.`
        : `The newest sheet for ${sheet.family} is edition ${String(next - 1)}.`,
      `Write edition: ${String(next)} into the sheet and send it again.`,
    );
  }
  await insertSheet(db, { id: newId(), sheet, text, addedBy: person.id, addedAt: now });
  await audit(db, {
    who: refOf(person),
    what: 'sheet.added',
    subject: { kind: 'sheet', id: sheet.family, name: sheet.title ?? sheet.family },
    ...(next === 1 ? {} : { before: { edition: next - 1 } }),
    after: { edition: sheet.edition },
    at: now,
  });
  return { sheet, text, at: now.toISOString() };
}
