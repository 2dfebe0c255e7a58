import { parse as parseYaml } from 'yaml';
import { BadInputError } from '../../shared/errors.js';
import type { PersonRef, UnitEvent } from '../../shared/history/events.js';
import { settleInspection, settleReading } from '../../shared/history/settle-reading.js';
import { captureBody, settleRun } from '../../shared/history/settle-run.js';
import { readCapture } from '../../shared/lamps/read-capture.js';
import { mayShut } from '../../shared/readiness/gates.js';
import type { StepResult } from '../../shared/script/run-log.js';
import { scriptSchema } from '../../shared/script/schema.js';
import type { Sheet } from '../../shared/sheet/schema.js';
import type { Context } from '../context.js';
import { openRuns, runWords } from '../journal/open-runs.js';
import { waitingEntries, type OutboxEntry } from '../journal/outbox.js';
import { logOf } from '../journal/run-journal.js';

/**
 * What happened to a unit on this bench that the server does not know yet, judged the way the server will judge it: what waits to be
 * sent, and what open runs have done so far, all but `besidesRun`; in the order in which it happened.
 *
 * What the server has refused, and what this sheet can't judge, opens nothing. A repair or a failed check in it still shuts: the machine
 * was opened, or is not safe, whoever writes it down. That is said on standard error.
 */
export function eventsOfWaiting(context: Context, unit: number, sheet: Sheet, besidesRun?: string): UnitEvent[] {
  const newId = (): string => context.newId();
  const shutsAllTheSame = (what: string, why: string, told: readonly UnitEvent[]): UnitEvent[] => {
    const against = told
      .flatMap((event) =>
        judgedOr(
          () => [settledBy(event, sheet)],
          () => [event],
        ),
      )
      .filter(mayShut);
    const counts =
      against.length > 0 ? 'What was mended or failed in it counts all the same; nothing else of it does' : 'Nothing of it counts';
    context.stderr.say(`The ${what}: ${why}. ${counts}.`);
    return against;
  };
  const waiting = waitingEntries(context.home).entries.flatMap((entry) => {
    if (!('params' in entry) || entry.params.number !== unit) return [];
    if (entry.refused)
      return [shutsAllTheSame(entry.what, 'the server refused it (refettle sync --status says why)', eventsAsWritten(entry, newId))];
    return [
      judgedOr(
        () => eventsOfEntry(entry, sheet, newId),
        (why) => shutsAllTheSame(entry.what, why, eventsAsWritten(entry, newId)),
      ),
    ];
  });
  const going = openRuns(context).runs.flatMap(({ written, script }) => {
    const { id, unit: number, by, rig } = written.header;
    if (number !== unit || id === besidesRun) return [];
    return [
      judgedOr(
        () => {
          if (!script) throw new BadInputError('this version of Refettle can’t read its script');
          return settleRun(logOf(context.home, written), script, sheet, by, newId).events.filter(({ kind }) => kind !== 'run ended');
        },
        (why) => shutsAllTheSame(runWords(written), why, stepsAsWritten(written.results, { id, by, simulated: rig.simulated }, newId)),
      ),
    ];
  });
  return inOrder([...waiting, ...going]);
}

/** Each by its own time, for a machine may be mended while a run is parked; the steps of one run stay in their order. */
function inOrder(works: readonly (readonly UnitEvent[])[]): UnitEvent[] {
  const timed = works.flatMap((events) => {
    let latest = 0;
    return events.map((event) => ({ event, at: (latest = Math.max(latest, Date.parse(event.at))) }));
  });
  return timed.sort((a, b) => a.at - b.at).map(({ event }) => event);
}

function judgedOr(judged: () => UnitEvent[], otherwise: (why: string) => UnitEvent[]): UnitEvent[] {
  try {
    return judged();
  } catch (error) {
    if (!(error instanceof BadInputError)) throw error;
    return otherwise(`this bench can’t judge it (${error.message})`);
  }
}

function settledBy(event: UnitEvent, sheet: Sheet): UnitEvent {
  if (event.kind === 'reading') return { ...event, reading: settleReading(event.reading, sheet) };
  if (event.kind === 'inspection') return { ...event, inspection: settleInspection(event.inspection, sheet) };
  return event;
}

/** Readings, inspections and repairs of a run, in its own words. */
function stepsAsWritten(
  results: readonly StepResult[],
  { id, by, simulated }: { id: string; by: PersonRef; simulated: boolean },
  newId: () => string,
): UnitEvent[] {
  return results.flatMap((result): UnitEvent[] => {
    const base = { id: newId(), at: result.endedAt, by, simulated, runId: id, stepId: result.stepId };
    if (result.kind === 'measure') return [{ ...base, kind: 'reading', reading: result.reading }];
    if (result.kind === 'inspect') return [{ ...base, kind: 'inspection', inspection: result.inspection }];
    return result.kind === 'repair' ? [{ ...base, kind: 'repair', repair: result.repair }] : [];
  });
}

/** What an entry says of itself, where no sheet is to be asked. */
function eventsAsWritten(entry: OutboxEntry, newId: () => string): UnitEvent[] {
  const { by, body, route } = entry;
  switch (route) {
    case 'recordRun':
      return stepsAsWritten(body.steps, { id: body.id, by, simulated: body.rig.simulated }, newId);
    case 'recordReading':
      return [{ id: body.id, at: body.at, by, simulated: body.simulated ?? false, kind: 'reading', reading: body.reading }];
    case 'recordInspection':
      return [{ id: body.id, at: body.at, by, simulated: body.simulated ?? false, kind: 'inspection', inspection: body.inspection }];
    case 'recordRepair':
      return [{ id: body.id, at: body.at, by, simulated: body.simulated ?? false, kind: 'repair', repair: body.repair }];
    case 'recordCapture':
    case 'takeInUnit':
      return [];
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
    case 'recordInspection':
    case 'recordRepair':
      return eventsAsWritten(entry, newId).map((event) => settledBy(event, sheet));
    case 'takeInUnit':
      return [];
  }
}
