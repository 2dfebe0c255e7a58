import { parse as parseYaml } from 'yaml';
import { BadInputError } from '../../shared/errors.js';
import type { UnitEvent } from '../../shared/history/events.js';
import { settleInspection, settleReading } from '../../shared/history/settle-reading.js';
import { captureBody, settleRun } from '../../shared/history/settle-run.js';
import { readCapture } from '../../shared/lamps/read-capture.js';
import { scriptSchema } from '../../shared/script/schema.js';
import type { Sheet } from '../../shared/sheet/schema.js';
import type { Context } from '../context.js';
import { openRuns } from '../journal/open-runs.js';
import { waitingEntries, type OutboxEntry } from '../journal/outbox.js';
import { logOf } from '../journal/run-journal.js';

/**
 * What happened to a unit on this bench that the server does not know yet, judged the way the server will judge it: what waits to be
 * sent, and what open runs have done so far, all but `besidesRun`. What the server has refused is not among it: it is not on the
 * unit's history. Neither is what this sheet has no judgement for.
 */
export function eventsOfWaiting(context: Context, unit: number, sheet: Sheet, besidesRun?: string): UnitEvent[] {
  const newId = (): string => context.newId();
  const waiting = waitingEntries(context.home).entries.flatMap((entry) =>
    !entry.refused && 'params' in entry && entry.params.number === unit ? orNone(() => eventsOfEntry(entry, sheet, newId)) : [],
  );
  const going = openRuns(context).runs.flatMap(({ written, script }) => {
    const { id, unit: number, by } = written.header;
    if (number !== unit || id === besidesRun || !script) return [];
    return orNone(() =>
      settleRun(logOf(context.home, written), script, sheet, by, newId).events.filter(({ kind }) => kind !== 'run ended'),
    );
  });
  return [...waiting, ...going];
}

function orNone(events: () => UnitEvent[]): UnitEvent[] {
  try {
    return events();
  } catch (error) {
    if (error instanceof BadInputError) return [];
    throw error;
  }
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
