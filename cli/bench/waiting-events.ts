import { parse as parseYaml } from 'yaml';
import type { UnitEvent } from '../../shared/history/events.js';
import { settleInspection, settleReading } from '../../shared/history/settle-reading.js';
import { captureBody, settleRun } from '../../shared/history/settle-run.js';
import { readCapture } from '../../shared/lamps/read-capture.js';
import { scriptSchema } from '../../shared/script/schema.js';
import type { Sheet } from '../../shared/sheet/schema.js';
import type { Context } from '../context.js';
import { waitingEntries, type OutboxEntry } from '../journal/outbox.js';

/**
 * What happened to a unit on this bench that the server does not know yet, judged the way the server will judge it.
 * What the server has refused is not among it: it is not on the unit's history.
 */
export function eventsOfWaiting(context: Context, unit: number, sheet: Sheet): UnitEvent[] {
  return waitingEntries(context.home).entries.flatMap((entry) =>
    !entry.refused && 'params' in entry && entry.params.number === unit ? eventsOfEntry(entry, sheet, () => context.newId()) : [],
  );
}

function eventsOfEntry(entry: OutboxEntry, sheet: Sheet, newId: () => string): UnitEvent[] {
  const { by, body, route } = entry;
  switch (route) {
    case 'recordRun':
      return settleRun(body, scriptSchema.parse(parseYaml(body.script.text)), sheet, by, newId).events;
    case 'recordCapture': {
      const capture = readCapture(body.file, body.id);
      const simulated = capture.header.source === 'simulated';
      return [
        {
          id: body.id,
          at: body.at,
          by,
          simulated,
          kind: 'capture',
          capture: captureBody(capture, sheet, { captureId: body.id, fromFile: body.fromFile ?? false }),
        },
      ];
    }
    case 'recordReading':
      return [
        { id: body.id, at: body.at, by, simulated: body.simulated ?? false, kind: 'reading', reading: settleReading(body.reading, sheet) },
      ];
    case 'recordInspection':
      return [
        {
          id: body.id,
          at: body.at,
          by,
          simulated: body.simulated ?? false,
          kind: 'inspection',
          inspection: settleInspection(body.inspection, sheet),
        },
      ];
    case 'recordRepair':
      return [{ id: body.id, at: body.at, by, simulated: body.simulated ?? false, kind: 'repair', repair: body.repair }];
    case 'takeInUnit':
      return [];
  }
}
