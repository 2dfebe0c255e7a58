import { isCharged } from '../../shared/script/charge.js';
import { runVerdict } from '../../shared/script/run-verdict.js';
import { sinceOpened } from '../../shared/readiness/facts.js';
import { mayHoldCharge } from '../../shared/readiness/gates.js';
import type { PersonRef } from '../../shared/history/events.js';
import type { ClockJump, RunDamage, StepResult } from '../../shared/script/run-log.js';
import type { Script } from '../../shared/script/schema.js';
import type { Verdict } from '../../shared/verdict.js';
import type { Context } from '../context.js';
import { NobodyToAskError } from '../errors.js';
import { EXIT, firstExitCode } from '../exit-codes.js';
import { readIfThere } from '../home.js';
import type { OpenRig } from '../instruments/rig.js';
import { sendNow, type Delivery } from '../journal/deliver.js';
import { heldWords, takeLock, type Lock } from '../journal/lock.js';
import { closeRun, rigLock, runLock } from '../journal/open-runs.js';
import { journalFileOf, readRunJournal, writtenRun, type RunJournal, type RunStop } from '../journal/run-journal.js';
import { SteadyClock } from '../journal/steady-clock.js';
import { liveOf } from '../live/live-of.js';
import { MAY_BE_CHARGED } from '../render/charge-words.js';
import { deliveryWords } from '../render/delivery-words.js';
import { printJson } from '../render/json.js';
import { runAnswer } from '../render/run-answer.js';
import { printRunEnd } from '../render/run-end.js';
import { runScript, type RunEnd } from './run-script.js';
import { simulatedTechnician } from './simulated-technician.js';
import type { Technician } from './technician.js';
import { terminalTechnician } from './terminal-technician.js';
import type { UnitOnBench } from './unit-on-bench.js';

export interface GoThroughParts {
  unit: UnitOnBench;
  /** Who does the steps from here on. */
  person: PersonRef;
  script: Script;
  scriptText: string;
  rig: OpenRig;
  technician: Technician;
  json: boolean;
  /** What the run has before this: nothing where it begins. */
  before: readonly StepResult[];
  damages?: readonly RunDamage[];
  /** The latest time that the log holds. */
  notBefore?: string;
  /** Puts the first lines into the journal, once nothing is in the way any more. */
  openJournal: (clock: { now(): Date }) => RunJournal;
}

/** Who answers. Nobody answers a caution of a real machine for a person: such a run ends before a port is opened. */
export function technicianFor(unattended: boolean, context: Context, rig: OpenRig, script: Script, currency: string): Technician {
  if (context.interactive && !unattended) return terminalTechnician(context, currency, { parks: true });
  if (rig.hands) return simulatedTechnician(context, rig.hands);
  const asks = script.steps.find((step) => step.kind === 'caution') ?? script.steps.find((step) => step.kind !== 'expect');
  if (asks)
    throw new NobodyToAskError(
      `Step '${asks.id}' (${asks.title}) waits for a person. Nothing was begun, no port was opened.`,
      'run it at a terminal and without --unattended',
    );
  return terminalTechnician(context, currency);
}

/** One run a rig, one terminal a run. Undefined where somebody else has it; who, was said then. */
export async function takeRunLocks(context: Context, runId: string, rigName: string, what: string): Promise<Lock | undefined> {
  const locks: Lock[] = [];
  const release = (): void => locks.splice(0).forEach((lock) => lock.release());
  for (const name of [runLock(runId), rigLock(rigName)]) {
    const lock = await takeLock(context, name, { what, run: runId });
    if ('owner' in lock) {
      release();
      const which = name === rigLock(rigName) ? `The rig ${rigName}` : 'This run';
      context.stderr.say(`${which} is taken: ${heldWords(lock.owner)}. One run at a time; refettle runs lists them.`);
      return undefined;
    }
    locks.push(lock);
  }
  return { release };
}

/**
 * Goes through a run to its end, or to where it is left. At its end it is closed and sent; left before that it stays on this bench
 * and is resumed or abandoned.
 */
export async function goThrough(context: Context, parts: GoThroughParts): Promise<number> {
  const { unit, rig, person, before } = parts;
  if (mayHoldCharge(unit.facts.events)) context.stderr.say(MAY_BE_CHARGED);
  if (rig.simulated && [...sinceOpened(unit.facts.events), ...before].some(({ kind }) => kind === 'repair')) rig.hands?.repaired();
  const startedMs = performance.now();
  /** Set back while nobody was at the run: noted as soon as the journal is open. */
  const early: Omit<ClockJump, 'steps'>[] = [];
  let note = (jump: Omit<ClockJump, 'steps'>): void => void early.push(jump);
  const clock = new SteadyClock(
    () => context.now(),
    () => performance.now(),
    (jump) => {
      sayJump(context, jump);
      note(jump);
    },
    parts.notBefore,
  );
  const steady: Context = { ...context, now: () => clock.now() };
  const journal = parts.openJournal(clock);
  note = (jump) => journal.jump(jump);
  early.forEach(note);
  const live = liveOf(steady);
  const { header } = journal;
  let end: RunEnd;
  try {
    end = await runScript({ ...parts, context: steady, journal });
  } catch (error) {
    await rig.close();
    leave(journal, clock, 'fault', person);
    sayCharge(context, parts, header.id);
    await live.ends('failed');
    throw error;
  }
  await rig.close();
  const tookMs = performance.now() - startedMs;
  const { results } = end;
  if (end.interrupted) {
    leave(journal, clock, end.left ?? 'stopped', person);
    sayCharge(context, parts, header.id);
    const verdict = runVerdict(results, true);
    const code = firstExitCode([end.exitCode, EXIT.notGood]);
    await say(context, parts, { results, verdict, code, tookMs, runId: header.id, left: end.left ?? 'stopped' });
    await live.runEnds(results, end);
    return code;
  }
  journal.end(clock.now().toISOString(), false);
  journal.close();
  sayCharge(context, parts, header.id);
  const entry = closeRun(context, writtenRun(context.home, header.id));
  const delivery = await sendNow(context, entry);
  const verdict = runVerdict(results, false);
  const code = firstExitCode([
    end.exitCode,
    verdict === 'pass' ? EXIT.good : EXIT.notGood,
    delivery.state === 'sent' ? EXIT.good : EXIT.server,
  ]);
  await say(context, parts, { results, verdict, code, tookMs, runId: header.id, delivery });
  // Closed, sent and said first: nothing waits for those who watch.
  await live.runEnds(results, end);
  return code;
}

/** Says in the journal why nobody goes on. Where even that can't be written, the journal says so by its silence: it was broken off. */
function leave(journal: RunJournal, clock: SteadyClock, how: RunStop['how'], by: PersonRef): void {
  try {
    const at = clock.now().toISOString();
    if (how === 'parked') journal.person({ person: by, at, how });
    journal.stop({ at, how, by });
  } catch {
    // A full disk: what stopped the run is said already, or is about to be.
  } finally {
    journal.close();
  }
}

/** Nobody walks away from a machine that may bite without being told. */
function sayCharge(context: Context, { script, unit }: GoThroughParts, runId: string): void {
  const written = readRunJournal(readIfThere(journalFileOf(context.home, runId)) ?? '');
  if (written && isCharged(written.results, script, unit.sheet, written.begun?.stepId)) context.stderr.say(MAY_BE_CHARGED);
}

function sayJump({ stderr }: Context, { seconds }: { seconds: number }): void {
  stderr.say(
    `The clock of this bench was set ${seconds > 0 ? 'forward' : 'back'} by ${Math.abs(seconds)} s. The log's own times go on without running backwards; the jump is noted in it.`,
  );
}

interface Said {
  results: readonly StepResult[];
  verdict: Verdict;
  code: number;
  tookMs: number;
  runId: string;
  delivery?: Delivery;
  left?: RunStop['how'];
}

async function say(context: Context, { json, unit, script }: GoThroughParts, said: Said): Promise<void> {
  const { delivery, results, verdict, runId, left } = said;
  if (delivery && delivery.state !== 'sent') context.stderr.say(deliveryWords(delivery));
  if (json) {
    const sent = delivery?.state === 'sent';
    printJson(context, runAnswer({ id: runId, unit: unit.page.unit.number, script: script.name, verdict, sent, left, results }));
    return;
  }
  await printRunEnd(context, { unit, script, ...said });
}
