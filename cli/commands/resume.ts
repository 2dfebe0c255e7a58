import { goThrough, takeRunLocks, technicianFor } from '../bench/go-through.js';
import { refuseFindings } from '../bench/read-script.js';
import { refuseStranger } from '../bench/refuse-stranger.js';
import { signOn } from '../bench/sign-on.js';
import { unitOnBench } from '../bench/unit-on-bench.js';
import { BadInputError } from '../../shared/errors.js';
import { isCharged } from '../../shared/script/charge.js';
import { runVerdict } from '../../shared/script/run-verdict.js';
import type { Sheet } from '../../shared/sheet/schema.js';
import type { Context } from '../context.js';
import { UsageError } from '../errors.js';
import { EXIT, firstExitCode } from '../exit-codes.js';
import { closedRunNamed, type ClosedRun } from '../journal/closed-runs.js';
import { sendWaiting } from '../journal/deliver.js';
import { heldWords } from '../journal/lock.js';
import { closeEnded, openRuns, runWords, type OpenRun } from '../journal/open-runs.js';
import type { OutboxEntry } from '../journal/outbox.js';
import {
  cutOf,
  damagesOf,
  journalFileOf,
  lastPersonIn,
  resultsOf,
  RunJournal,
  writtenRun,
  type WrittenRun,
} from '../journal/run-journal.js';
import { MAY_BE_CHARGED } from '../render/charge-words.js';
import { deliveryWords } from '../render/delivery-words.js';
import { printJson } from '../render/json.js';
import { openRunText } from '../render/open-run-text.js';
import { runAnswer } from '../render/run-answer.js';
import { printRunHeader } from '../render/run-header.js';
import { plural, unitLabel } from '../render/words.js';

export interface ResumeOptions {
  /** The run's id, or the unit's number. Undefined: the only one there is, or the one that is chosen. */
  run?: string | undefined;
  rig?: string | undefined;
  unattended?: boolean | undefined;
  json?: boolean | undefined;
}

/** Goes on with a run of this bench where it was left. */
export async function runResume(options: ResumeOptions, context: Context): Promise<number> {
  const endedNow = await closeEnded(context);
  const closed = closedInstead(options.run, context, endedNow);
  if (closed) return finishClosed(closed, options, context);
  const open = await openRunNamed(options.run, context, 'resume');
  return open === undefined ? EXIT.notGood : resumeRun(options, context, open);
}

/** The run that is meant, among those of this bench that nobody is at. Undefined: it is not to be had; why, was said then. */
export async function openRunNamed(named: string | undefined, context: Context, verb: 'resume' | 'abandon'): Promise<OpenRun | undefined> {
  const { runs, unreadable } = openRuns(context);
  for (const file of unreadable)
    context.stderr.say(`${file}: its first line is damaged, so which run it was can't be said. It is left where it is.`);
  if (named !== undefined) {
    const unit = /^\d{1,9}$/.test(named) ? Number(named) : undefined;
    const found = runs.filter(({ written: { header } }) => (unit === undefined ? header.id === named.toLowerCase() : header.unit === unit));
    if (found.length > 1) throw new UsageError(`${unitLabel(unit ?? 0)} has ${found.length} open runs. Name one:\n${listed(found)}`);
    const open = found[0];
    if (!open) throw new UsageError(`This bench has no open run '${named}': refettle runs lists them`);
    if (open.owner) {
      context.stderr.say(`It is going on: ${heldWords(open.owner)}.`);
      return undefined;
    }
    return open;
  }
  const free = runs.filter(({ owner }) => owner === undefined);
  if (free.length === 0) {
    context.stderr.say(`No run of this bench waits to be ${verb === 'resume' ? 'resumed' : 'abandoned'}.`);
    return undefined;
  }
  const [only] = free;
  if (only && free.length === 1 && verb === 'resume') return only;
  if (!context.interactive) throw new UsageError(`Which run? Name one:\n${listed(free)}`);
  const id = await context.prompt.choice({
    message: `Which run to ${verb}?`,
    choices: free.map((open) => ({ value: open.written.header.id, name: `${unitLabel(open.written.header.unit)}  ${openRunText(open)}` })),
    instead: `name one: refettle ${verb} RUN`,
  });
  return free.find(({ written }) => written.header.id === id);
}

/** A run that is meant and has ended already: the program was killed after its last step, or it was sent long ago. Undefined: one that is open is meant. */
export function closedInstead(named: string | undefined, context: Context, endedNow: readonly OutboxEntry[]): ClosedRun | undefined {
  const { runs } = openRuns(context);
  if (named === undefined) {
    const ended = runs.some(({ owner }) => owner === undefined) ? undefined : endedNow.at(-1);
    return ended && closedRunNamed(context.home, ended.id);
  }
  const isOpen = runs.some(
    ({ written: { header } }) => header.id === named.toLowerCase() || String(header.unit) === named.replace(/^0+/, ''),
  );
  return isOpen ? undefined : closedRunNamed(context.home, named);
}

/** Nothing is left to do at the machine: what waits is sent, and the run's own verdict decides. */
async function finishClosed({ entry, where }: ClosedRun, { json }: ResumeOptions, context: Context): Promise<number> {
  const { body, id, what, params } = entry;
  const delivery = where === 'waiting' ? (await sendWaiting(context, { again: true })).find((one) => one.entry.id === id) : undefined;
  const sent = where === 'sent' || delivery?.state === 'sent';
  const verdict = runVerdict(body.steps, body.interrupted);
  context.stderr.say(`The ${what} has ended and is closed: nothing of it is left to do at the machine.`);
  if (where === 'dropped') context.stderr.say('The server refused it, and it was given up; it stays on the disk.');
  else if (!sent) context.stderr.say(delivery ? deliveryWords(delivery) : 'It waits to be sent: refettle sync');
  if (json === true)
    printJson(context, runAnswer({ id, unit: params.number, script: body.script.name, verdict, sent, results: body.steps }));
  else context.stdout.write(`${what}: ${verdict}. ${sent ? 'It is sent.' : 'It is not sent.'}\n`);
  return firstExitCode([verdict === 'pass' ? EXIT.good : EXIT.notGood, sent ? EXIT.good : EXIT.server]);
}

const listed = (runs: readonly OpenRun[]): string =>
  runs.map((open) => `  ${open.written.header.id}  ${unitLabel(open.written.header.unit)}  ${openRunText(open)}`).join('\n');

export async function resumeRun(options: Omit<ResumeOptions, 'run'>, context: Context, open: OpenRun): Promise<number> {
  const { header } = open.written;
  const { script } = open;
  const journalFile = journalFileOf(context.home, header.id);
  if (!script)
    throw new BadInputError('this version of Refettle can’t read the script in it: refettle abandon closes the run', { file: journalFile });
  if (header.server !== context.server) throw new UsageError(`That run is for the server at ${header.server}: set REFETTLE_SERVER to it`);
  const person = await signOn(context, 'resume');
  refuseStranger(context, person, lastPersonIn(open.written));
  const unit = { ...(await unitOnBench(context, header.unit, undefined, header.id)), by: person };
  sayWhatChanged(context, open, unit.sheet.edition);
  refuseFindings(script, unit.sheet, `the script of run ${header.id}`);
  const rig = await context.openRig(options.rig ?? header.rigChoice);
  try {
    if (rig.name !== header.rig.name || rig.simulated !== header.rig.simulated)
      throw new UsageError(
        `That run was begun on the rig ${header.rig.name}, and this one is ${rig.name}: its readings would not be told apart`,
      );
    const technician = technicianFor(options.unattended === true, context, rig, script, unit.me.shop.currency);
    const lock = await takeRunLocks(context, header.id, rig.name, `${runWords(open.written)} by ${person.name}`);
    if (!lock) return EXIT.notGood;
    try {
      // Read again now that nobody else writes it.
      const written = writtenRun(context.home, header.id);
      const cut = cutOf(context.home, written);
      await printRunHeader(context, unit, script, rig);
      sayWhereItStands(context, { ...open, written }, cut !== undefined, unit.sheet);
      const before = [...resultsOf(context.home, written), ...(cut ? [{ ...cut, ...byOf(written) }] : [])];
      return await context.interruption.hold(() =>
        goThrough(context, {
          unit,
          person,
          script,
          scriptText: header.script.text,
          rig,
          technician,
          json: options.json === true,
          before,
          damages: damagesOf(context.home, written),
          notBefore: cut && cut.endedAt > written.lastAt ? cut.endedAt : written.lastAt,
          openJournal: (clock) => {
            const journal = RunJournal.goOn(context.home, written);
            if (cut) journal.record({ ...cut, ...byOf(written) });
            const how = person.id === lastPersonIn(written).id ? 'resumed' : 'took over';
            journal.person({ person, at: clock.now().toISOString(), how });
            return journal;
          },
        }),
      );
    } finally {
      lock.release();
    }
  } finally {
    await rig.close();
  }
}

/** Whose step it was that was broken off; absent where it was who began the run. */
export function byOf(written: WrittenRun): { by?: string } {
  const { id } = lastPersonIn(written);
  return id === written.header.by.id ? {} : { by: id };
}

function sayWhatChanged({ stderr }: Context, { written }: OpenRun, edition: number): void {
  const { damage, header } = written;
  if (damage)
    stderr.say(
      `Line ${damage.line} of the run's journal is damaged: ${damage.reason}. What stands before it is good. ` +
        `${plural(damage.behind, 'line')} behind it ${damage.behind === 1 ? 'is' : 'are'} not taken for done: those steps are asked again. Nothing is deleted, and a fail, a code or a repair among them counts.`,
    );
  if (header.sheetEdition !== undefined && header.sheetEdition !== edition)
    stderr.say(
      `The service sheet has edition ${edition} by now; the run was begun by edition ${header.sheetEdition}. What the newer one can judge, it judges.`,
    );
}

function sayWhereItStands({ stderr }: Context, open: OpenRun, cut: boolean, sheet: Sheet): void {
  const { written, script } = open;
  const begun = script?.steps.find(({ id }) => id === written.begun?.stepId);
  const lines = [`Resumed: ${openRunText(open)}.`];
  if (begun)
    lines.push(
      `Step '${begun.title}' had begun and has no result: it is asked again.${cut ? ' The lamps recorded before the break are kept.' : ''}`,
    );
  if (script && isCharged(written.results, script, sheet, begun?.id)) lines.push(MAY_BE_CHARGED);
  lines.push(
    'The machine may have been switched on or opened meanwhile: isolate and prove dead before you touch it. What energises it is asked with its caution again.',
  );
  stderr.say(lines.join('\n'));
}
