import { v7 as newId } from 'uuid';
import type { User } from '../../../shared/api/sessions.js';
import { BadInputError } from '../../../shared/errors.js';
import { lateSheet } from '../../../shared/history/late-sheet.js';
import { settleRun, type SettledRun } from '../../../shared/history/settle-run.js';
import type { PersonRef } from '../../../shared/history/events.js';
import { runGateBreach } from '../../../shared/readiness/run-gates.js';
import { stageOf } from '../../../shared/readiness/stage.js';
import { checkScript } from '../../../shared/script/check-script.js';
import { readScript } from '../../../shared/script/read-script.js';
import { holdsFile, peopleOf, type RunLog, type StepResult } from '../../../shared/script/run-log.js';
import type { Script } from '../../../shared/script/schema.js';
import type { Sheet } from '../../../shared/sheet/schema.js';
import type { Verdict } from '../../../shared/verdict.js';
import { unitNumberText } from '../../../shared/unit-number.js';
import type { BenchRef } from '../../auth/bench-store.js';
import type { Db } from '../../db.js';
import { ConflictError, GateError, InvalidError } from '../../errors.js';
import { atPointer } from '../../history/at-pointer.js';
import { insertCapture } from '../../history/capture-store.js';
import { donorsOf, takePartFrom } from '../../history/donor.js';
import { happenedAt, refuseFuture } from '../../history/happened-at.js';
import { insertRun } from '../../history/run-store.js';
import { sheetOf } from '../../history/sheet-of.js';
import { findSheet } from '../../history/sheet-store.js';
import {
  factsOf,
  openUnitHistory,
  placeEach,
  placeOf,
  recordEvents,
  refOf,
  type Place,
  type UnitHistory,
} from '../../history/unit-history.js';
import { refuseWhatIsNoText } from '../../request-faults.js';
import { withPeopleOfTheShop } from './people-of-log.js';
import { logFaults } from './log-against-script.js';

/** Every time in the log, with a Z at its end; one that no clock can say is refused where it stands. */
function withTimesInUtc(log: RunLog, now: Date): RunLog {
  const utc = (at: string, pointer: string): string => happenedAt(at, now, pointer).toISOString();
  return {
    ...log,
    startedAt: utc(log.startedAt, '/startedAt'),
    endedAt: utc(log.endedAt, '/endedAt'),
    people: log.people.map((one, index) => ({ ...one, at: utc(one.at, `/people/${String(index)}/at`) })),
    steps: log.steps.map((step, index) => ({
      ...step,
      startedAt: utc(step.startedAt, `/steps/${String(index)}/startedAt`),
      endedAt: utc(step.endedAt, `/steps/${String(index)}/endedAt`),
    })),
    ...(log.damages && {
      damages: log.damages.map((damage, index) => ({
        ...damage,
        found: damage.found.map((step) => ({
          ...step,
          startedAt: utc(step.startedAt, `/damages/${String(index)}/found`),
          endedAt: utc(step.endedAt, `/damages/${String(index)}/found`),
        })),
      })),
    }),
  };
}

function readScriptOf(log: RunLog, sheet: Sheet): Script {
  const script = atPointer('/script/text', () => readScript(log.script.text));
  const findings = checkScript(script, sheet);
  if (findings.length > 0) {
    throw new InvalidError(
      findings.map(({ step, reason }) => ({ pointer: '/script/text', reason: step === undefined ? reason : `step ${step}: ${reason}` })),
    );
  }
  return script;
}

function settle(log: RunLog, script: Script, sheet: Sheet, by: PersonRef): SettledRun {
  try {
    return settleRun(log, script, sheet, by, newId);
  } catch (error) {
    if (!(error instanceof BadInputError)) throw error;
    const index = log.steps.findIndex((step) => holdsFile(step) && step.captureId === error.file);
    const reason = error.line === undefined ? error.message : `line ${String(error.line)}: ${error.message}`;
    throw new InvalidError([{ pointer: index < 0 ? '/steps' : `/steps/${String(index)}/file`, reason }]);
  }
}

function askGates(history: UnitHistory, settled: SettledRun, script: Script, sheet: Sheet, before: Place['before']): void {
  const number = unitNumberText(history.unit.number);
  if (history.unit.licensedOnly) {
    throw new GateError(
      `No script runs on unit ${number}`,
      ['gas, sealed refrigerant or a microwave oven: licensed person only'],
      'hand it to a licensed person',
    );
  }
  const breach = runGateBreach(settled, script, sheet, factsOf(history, before));
  if (breach)
    throw new GateError(`Step ${breach.stepId} of the run on unit ${number} should not have begun`, breach.reasons, breach.remedy);
}

/** What was measured on a machine that is the buyer's says nothing about what was sold. Before the sale, it is taken down as what it was. */
function refuseAfterSale(unitNumber: number, before: Place['before']): void {
  if (stageOf(before) !== 'sold') return;
  const number = unitNumberText(unitNumber);
  throw new ConflictError(
    `Unit ${number} was sold before this run began, so it is not on its books.`,
    `Is it the right unit? If it came back, a lead takes ${number} in as returned; if the run was a mistake, give it up: refettle sync --drop ID.`,
  );
}

/**
 * By the newest sheet; where that no longer has what the script asks for, with what it lacks out of the edition that the run was made
 * with. Whatever the newest can judge, decode or shut a gate by, it does: a sender gains nothing by naming an edition.
 */
async function settleByFittingSheet(
  db: Db,
  history: UnitHistory,
  told: RunLog,
  by: PersonRef,
): Promise<{ sheet: Sheet; script: Script; settled: SettledRun }> {
  const settledBy = (sheet: Sheet): { sheet: Sheet; script: Script; settled: SettledRun } => {
    const script = readScriptOf(told, sheet);
    const faults = logFaults(told, script);
    if (faults.length > 0) throw new InvalidError(faults);
    return { sheet, script, settled: settle(told, script, sheet, by) };
  };
  const newest = sheetOf(history, 'no script can run on it');
  if (told.sheetEdition !== undefined && told.sheetEdition > newest.edition) {
    const reason = `is an edition that the shop does not have: the newest of ${newest.family} is ${String(newest.edition)}. A lead adds it first`;
    throw new InvalidError([{ pointer: '/sheetEdition', reason }]);
  }
  try {
    return settledBy(newest);
  } catch (error) {
    if (!(error instanceof InvalidError) || told.sheetEdition === undefined || told.sheetEdition >= newest.edition) throw error;
    const older = await findSheet(db, newest.family, told.sheetEdition);
    if (!older) throw error;
    try {
      return settledBy(lateSheet(newest, older.sheet));
    } catch (lateError) {
      // It does not fit even so: what is wrong with it today is what can be mended.
      throw lateError instanceof InvalidError ? error : lateError;
    }
  }
}

/** A bench log, whole: nothing of it is believed before it has been decoded, judged and asked for at the gates again. */
export async function recordRun(
  db: Db,
  unitNumber: number,
  request: RunLog,
  { person, bench, now }: { person: User; bench: BenchRef | undefined; now: Date },
): Promise<{ id: string; verdict: Verdict }> {
  const told = await withPeopleOfTheShop(db, withTimesInUtc(request, now), person, bench);
  const found = (told.damages ?? []).flatMap((damage) => damage.found);
  const repairs = [...told.steps, ...found].flatMap((step) => (step.kind === 'repair' ? [step.repair] : []));
  const history = await openUnitHistory(db, unitNumber, donorsOf(repairs));
  const { unit } = history;
  const { before } = placeOf(history, new Date(told.startedAt), now);
  refuseAfterSale(unitNumber, before);
  const by = refOf(person);
  const { sheet, script, settled } = await settleByFittingSheet(db, history, told, by);
  refuseWhatIsNoText(settled.events, '/steps');
  for (const { body } of settled.captures) refuseFuture(body.capturedAt, now, '/steps');
  // What the bench could know when it began: what others wrote down meanwhile is placed around the run's steps, and shuts no gate behind it.
  askGates(history, settled, script, sheet, before);

  const withoutFile = (step: StepResult): StepResult => (holdsFile(step) ? { ...step, file: '' } : step);
  const steps = settled.log.steps.map(withoutFile);
  const damages = told.damages?.map((damage) => ({ ...damage, found: damage.found.map(withoutFile) }));
  const log = { ...settled.log, steps, ...(damages ? { damages } : {}) };
  const stored = await insertRun(db, { unitId: unit.id, by, log, verdict: settled.verdict, recordedAt: now });
  if (!stored) throw new ConflictError('A run with this id is stored already.', 'Send the run again under the key it was first sent with.');
  const { doer } = peopleOf(settled.log, by);
  await storeCaptures(db, history, settled, doer, now);
  for (const [index, step] of withRepairsOnlyFound(settled.log.steps, found).entries()) {
    if (step.kind !== 'repair') continue;
    await takePartFrom(db, history, step.repair, {
      at: step.endedAt,
      by: doer(step.by),
      simulated: settled.log.rig.simulated,
      now,
      pointer: index < steps.length ? `/steps/${String(index)}/repair/partSource/fromUnit` : '/damages',
    });
  }
  await recordEvents(db, history, placeEach(history, settled.events, now), now);
  return { id: told.id, verdict: settled.verdict };
}

/** A repair behind damage took its part from the donor, too, unless it was written down again as its step was asked again. */
const withRepairsOnlyFound = (steps: readonly StepResult[], found: readonly StepResult[]): StepResult[] => {
  const part = (step: StepResult): string => (step.kind === 'repair' ? JSON.stringify([step.repair.part, step.repair.partSource]) : '');
  const again = new Set(steps.map(part));
  return [...steps, ...found.filter((step) => !again.has(part(step)))];
};

async function storeCaptures(
  db: Db,
  { unit }: UnitHistory,
  { log, captures }: SettledRun,
  doer: (by: string | undefined) => PersonRef,
  now: Date,
): Promise<void> {
  for (const { id, file, body } of captures) {
    const found = (log.damages ?? []).flatMap((damage) => damage.found);
    const step = [...log.steps, ...found].find((one) => holdsFile(one) && one.captureId === id);
    const at = step?.endedAt ?? log.endedAt;
    const by = doer(step?.by);
    const simulated = log.rig.simulated || body.source === 'simulated';
    const stored = await insertCapture(db, { id, unitId: unit.id, runId: log.id, by, at, simulated, body, file, recordedAt: now });
    if (!stored) throw new ConflictError(`The capture ${id} of this run is stored already.`, 'Give each capture an id of its own.');
  }
}
