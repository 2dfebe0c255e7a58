import { countingEvents } from '../../../shared/readiness/facts.js';
import { energisingGate } from '../../../shared/readiness/gates.js';
import { readiness } from '../../../shared/readiness/readiness.js';
import { stageOf } from '../../../shared/readiness/stage.js';
import { historiesOf } from '../../history/event-store.js';
import { facesOf } from '../../history/faces.js';
import { runsOf } from '../../history/run-store.js';
import { newestSheets } from '../../history/sheet-store.js';
import { readShop } from '../../history/shop-store.js';
import { newestTags } from '../../history/tag-store.js';
import { eventsOf, factsOf, readUnitHistory } from '../../history/unit-history.js';
import { listUnits } from '../../history/unit-store.js';
import { cursorOf, numberCursor, pageOf } from '../../paging.js';
import type { RegisterRoute } from '../../route.js';
import { giveFamily, takeIn } from './units-service.js';
import { codesInHistory, tagStateOf, unitRowOf } from './unit-views.js';

export function registerUnitRoutes(route: RegisterRoute): void {
  route('listUnits', async ({ query, trx }) => {
    const units = await listUnits(trx, { find: query.find, stage: query.stage, below: numberCursor(query.cursor), limit: query.limit + 1 });
    const page = pageOf(
      units.map(({ unit }) => unit),
      query.limit,
      (unit) => cursorOf(String(unit.number)),
    );
    const ids = page.items.map((unit) => unit.id);
    const families = [...new Set(page.items.flatMap((unit) => unit.family ?? []))];
    const [shop, histories, sheets, tags] = [
      await readShop(trx),
      await historiesOf(trx, ids),
      await newestSheets(trx, families),
      await newestTags(trx, ids),
    ];
    const items = page.items.map((unit) =>
      unitRowOf({
        unit,
        shop,
        sheet: unit.family === undefined ? undefined : sheets.get(unit.family),
        placed: histories.get(unit.id) ?? [],
        tag: tags.get(unit.id),
      }),
    );
    return { ...page, items };
  });

  route('takeInUnit', ({ body, person, trx, now }) => takeIn(trx, body, person, now));

  route('giveFamily', ({ params, body, trx }) => giveFamily(trx, params.number, body.family));

  route('getUnit', async ({ params, trx }) => {
    const history = await readUnitHistory(trx, params.number);
    const events = eventsOf(history);
    const facts = factsOf(history, events);
    return {
      unit: history.unit,
      stage: stageOf(countingEvents(facts)),
      readiness: readiness(facts),
      // In the demo shop the page speaks for its simulated bench; a real rig asks for itself and is told otherwise.
      energising: energisingGate(facts, { rigSimulated: history.shop.demo }),
      ...(history.tag ? { tag: tagStateOf(history.tag) } : {}),
      runs: await runsOf(trx, history.unit.id),
      events,
      faces: facesOf(codesInHistory(events), history.sheet),
    };
  });
}
