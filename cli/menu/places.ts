import { joinedBench } from '../bench/joined-bench.js';
import type { KeptUnit } from '../bench/kept-units.js';
import { sheetOf, unitPage } from '../bench/unit-on-bench.js';
import type { Context } from '../context.js';
import { openRuns } from '../journal/open-runs.js';
import { waitingEntries } from '../journal/outbox.js';
import { openRunText } from '../render/open-run-text.js';
import { unitLabel, unitNumberText } from '../render/words.js';
import { readSession } from '../session.js';
import { chooseCheck, chooseOf, chooseRig, chooseScript, chooseUnit, unitsKnown } from './choose.js';
import { doAndWait, doCommand } from './do-command.js';

/** What can be done with one unit, in the order of a day. */
const WITH_A_UNIT = [
  ['show', 'Show it: plate, stage, what is missing, history'],
  ['run', 'Run a bench script on it'],
  ['capture', 'Capture its lamps'],
  ['measure', 'Measure one check'],
  ['repair', 'Put down what was mended'],
  ['tag', 'Its readiness tag'],
] as const;
export type UnitWork = (typeof WITH_A_UNIT)[number][0];

/** Units at the bench for whoever works there, signed-off ones for the sales desk. */
export function waitingFor(role: string | undefined, units: readonly KeptUnit[]): KeptUnit[] {
  const done = ['signed off', 'sold'];
  return units.filter(({ stage }) => (role === 'sales' ? stage === 'signed off' : !done.includes(stage)));
}

export async function unitsWaiting(context: Context): Promise<void> {
  const role = readSession(context.home, context.server)?.user.role;
  for (;;) {
    const units = waitingFor(role, await unitsKnown(context));
    if (units.length === 0) {
      context.stderr.say('No unit waits. Take one in: refettle unit new');
      return;
    }
    const number = await chooseUnit(context, 'Units waiting for you', units);
    if (number === undefined) return;
    for (;;) {
      const work = await chooseOf(context, unitLabel(number), WITH_A_UNIT);
      if (work === undefined) break;
      await withUnit(work, number, context);
      if (context.interruption.interrupted) return;
    }
  }
}

/** The unit is asked for first. */
export async function chosenUnit(work: UnitWork, context: Context): Promise<void> {
  const number = await chooseUnit(context, 'Which unit', await unitsKnown(context));
  if (number !== undefined) await withUnit(work, number, context);
}

async function withUnit(work: UnitWork, number: number, context: Context): Promise<void> {
  const unit = unitNumberText(number);
  switch (work) {
    case 'show':
      return doAndWait(['unit', 'show', unit], context);
    case 'repair':
      return doAndWait(['repair', unit], context);
    case 'tag':
      return doAndWait(['tag', unit], context);
    case 'run':
      return startRun(number, context);
    case 'capture':
      return capture(unit, context);
    case 'measure':
      return measure(number, context);
  }
}

async function startRun(number: number, context: Context): Promise<void> {
  const { value: page } = await unitPage(context, number);
  const script = await chooseScript(context, page.unit.family);
  const rig = script === undefined ? undefined : await chooseRig(context);
  if (script !== undefined && rig) await doAndWait(['run', script, unitNumberText(number), ...rig], context);
}

async function capture(unit: string, context: Context): Promise<void> {
  const how = await chooseOf(context, 'How', [
    ['probe', 'By the light probe of the rig'],
    ['keys', 'By hand: tap the lamps with keys 1, 2, 3 …'],
  ]);
  const words = how === 'keys' ? ['--keys'] : how === 'probe' ? await chooseRig(context) : undefined;
  if (words) await doAndWait(['capture', unit, ...words], context);
}

async function measure(number: number, context: Context): Promise<void> {
  const { family } = (await unitPage(context, number)).value.unit;
  if (family === undefined) {
    context.stderr.say(
      `${unitLabel(number)} has no control family, so there is no service sheet with checks: refettle unit family ${unitNumberText(number)} FAMILY`,
    );
    return;
  }
  // Keeps the newest edition on this bench, network or not.
  await sheetOf(context, family);
  const check = await chooseCheck(context, family);
  if (!check) return;
  const how = check.kind === 'inspect' ? [] : await meterFor(context);
  if (how) await doAndWait(['measure', unitNumberText(number), check.id, ...how], context);
}

async function meterFor(context: Context): Promise<string[] | undefined> {
  const how = await chooseOf(context, 'With which meter', [
    ['rig', 'The rig’s'],
    ['typed', 'A handheld one; its reading is typed in'],
  ]);
  if (how !== 'typed') return how === 'rig' ? chooseRig(context) : undefined;
  const words: string[] = [];
  for (const [option, message] of [
    ['--value', 'Reading, like 12.41k'],
    ['--accuracy', 'Accuracy of that meter, like 0.8%+3'],
    ['--resolution', 'Value of its last digit, like 10'],
  ] as const)
    words.push(`${option}=${await context.prompt.text({ message, instead: `give it with ${option}`, refuse: mustBeThere })}`);
  return words;
}

const mustBeThere = (text: string): string | undefined => (text === '' ? 'it can’t stay empty' : undefined);

/** Runs that are not closed: gone on with, or given up with a reason. */
export async function openRunsHere(context: Context): Promise<void> {
  const { runs } = openRuns(context);
  if (runs.length === 0) {
    context.stderr.say('No run is open on this bench.');
    return;
  }
  const id = await chooseOf(
    context,
    'Which run',
    runs.map((run) => [run.written.header.id, `${unitLabel(run.written.header.unit)}  ${openRunText(run)}`] as const),
  );
  const what =
    id === undefined
      ? undefined
      : await chooseOf(context, 'And now', [
          ['resume', 'Go on with it'],
          ['abandon', 'Give it up, with a reason; what it recorded is kept and sent'],
        ]);
  if (id === undefined || what === undefined) return;
  if (what === 'abandon') {
    const reason = await context.prompt.text({ message: 'Why', instead: 'give it with --reason', refuse: mustBeThere });
    await doAndWait(['abandon', id, '--reason', reason], context);
    return;
  }
  const rig = await chooseRig(context);
  if (rig) await doAndWait(['resume', id, ...rig], context);
}

export async function whatWaits(context: Context): Promise<void> {
  if (waitingEntries(context.home).entries.length === 0) return doAndWait(['sync', '--status'], context);
  await doCommand(['sync', '--status'], context);
  if (context.interruption.interrupted) return;
  const now = await chooseOf(context, 'And now', [
    ['send', 'Try to send it'],
    ['back', 'Back to the menu'],
  ]);
  if (now === 'send') await doAndWait(['sync'], context);
}

/** What stands in the menu for who works here, and the command that it is. */
export function signing(context: Context): { name: string; args: string[] } {
  const joined = joinedBench(context.home, context.server);
  if (joined) return { name: `Sign on at the bench ${joined.bench.name}`, args: ['bench', 'sign-on'] };
  const session = readSession(context.home, context.server);
  return session ? { name: `Sign out (${session.user.name})`, args: ['sign-out'] } : { name: 'Sign in', args: ['sign-in'] };
}
