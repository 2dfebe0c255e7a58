import type { z } from 'zod';
import type { sheetRowSchema } from '../../../shared/api/sheets.js';
import { NotFoundError } from '../../errors.js';
import { editionsOf, findSheet, listNewestSheets, type StoredSheet } from '../../history/sheet-store.js';
import { cursorOf, pageOf, slugCursor } from '../../paging.js';
import type { RegisterRoute } from '../../route.js';
import { addSheet } from './sheets-service.js';

const rowOf = ({ sheet, at }: StoredSheet): z.input<typeof sheetRowSchema> => ({
  family: sheet.family,
  ...(sheet.title === undefined ? {} : { title: sheet.title }),
  ...(sheet.appliance === undefined ? {} : { appliance: sheet.appliance }),
  edition: sheet.edition,
  at,
});

export function registerSheetRoutes(route: RegisterRoute): void {
  route('listSheets', async ({ query, trx }) => {
    const sheets = await listNewestSheets(trx, slugCursor(query.cursor), query.limit + 1);
    return pageOf(sheets.map(rowOf), query.limit, (row) => cursorOf(row.family));
  });

  route('getSheet', async ({ params, query, trx }) => {
    const editions = await editionsOf(trx, params.family);
    const stored =
      query.edition === undefined || editions.includes(query.edition) ? await findSheet(trx, params.family, query.edition) : undefined;
    if (!stored) {
      throw new NotFoundError(
        editions.length === 0
          ? `There is no service sheet for ${params.family}.`
          : `The sheet for ${params.family} has the editions ${editions.join(', ')}.`,
      );
    }
    return { ...stored, editions };
  });

  route('addSheet', async ({ body, person, trx, now }) => rowOf(await addSheet(trx, body.text, person, now)));
}
