import { goThrough, takeRunLocks, technicianFor } from '../bench/go-through.js';
import { readScript, refuseFindings, textOf } from '../bench/read-script.js';
import { scriptFileOf } from '../bench/script-files.js';
import { signOn } from '../bench/sign-on.js';
import { unitOnBench } from '../bench/unit-on-bench.js';
import type { Context } from '../context.js';
import { UsageError } from '../errors.js';
import { EXIT } from '../exit-codes.js';
import { heldWords } from '../journal/lock.js';
import { closeEnded, openRuns, type OpenRun } from '../journal/open-runs.js';
import { RunJournal } from '../journal/run-journal.js';
import { openRunText } from '../render/open-run-text.js';
import { printRunHeader } from '../render/run-header.js';
import { unitLabel } from '../render/words.js';
import { resumeRun } from './resume.js';

export interface RunOptions {
  script: string;
  number: number;
  rig?: string | undefined;
  unattended?: boolean | undefined;
  json?: boolean | undefined;
}

/** Runs a bench script on a unit. What it recorded is on this bench's disk, whatever happens, and goes to the server at its end. */
export async function runScriptCommand(options: RunOptions, context: Context): Promise<number> {
  const file = scriptFileOf(context.home, options.script);
  const scriptText = textOf(file, 'bench script');
  const script = readScript(scriptText, file);
  await closeEnded(context);
  const open = openRuns(context).runs.find(({ written }) => written.header.unit === options.number);
  if (open) {
    const instead = await inItsPlace(options, context, open);
    if (instead !== undefined) return instead;
  }
  const person = await signOn(context, 'start');
  const unit = { ...(await unitOnBench(context, options.number)), by: person };
  refuseFindings(script, unit.sheet, file);
  if (unit.page.unit.licensedOnly) {
    context.stderr.say(
      `${unitLabel(options.number)} is for a licensed person only (gas, sealed refrigerant or a microwave oven): no script runs on it.`,
    );
    return EXIT.notGood;
  }
  const rig = await context.openRig(options.rig);
  const id = context.newId();
  try {
    const technician = technicianFor(options.unattended === true, context, rig, script, unit.me.shop.currency);
    const lock = await takeRunLocks(context, id, rig.name, `bench run ${script.name} on ${unitLabel(options.number)} by ${person.name}`);
    if (!lock) return EXIT.notGood;
    try {
      const { name, title, prove } = script;
      await printRunHeader(context, unit, script, rig);
      return await context.interruption.hold(() =>
        goThrough(context, {
          unit,
          person,
          script,
          scriptText,
          rig,
          technician,
          json: options.json === true,
          before: [],
          openJournal: (clock) =>
            RunJournal.create(context.home, {
              id,
              server: context.server,
              unit: options.number,
              by: person,
              script: { name, title, prove, text: scriptText },
              rig: { name: rig.name, simulated: rig.simulated },
              ...(options.rig === undefined ? {} : { rigChoice: options.rig }),
              sheetEdition: unit.sheet.edition,
              startedAt: clock.now().toISOString(),
              pid: process.pid,
            }),
        }),
      );
    } finally {
      lock.release();
    }
  } finally {
    await rig.close();
  }
}

/** The unit has a run on this bench that is not closed: somebody decides what becomes of it. Undefined: a new one begins all the same. */
async function inItsPlace(options: RunOptions, context: Context, open: OpenRun): Promise<number | undefined> {
  const { id, unit } = open.written.header;
  if (open.owner) {
    context.stderr.say(`${unitLabel(unit)} is on the bench already: ${heldWords(open.owner)}.`);
    return EXIT.notGood;
  }
  const words = `${unitLabel(unit)} has an open run on this bench: ${openRunText(open)}.`;
  const commands = `refettle resume ${id} goes on with it; refettle abandon ${id} --reason TEXT closes it`;
  if (!context.interactive || options.unattended === true) throw new UsageError(`${words} ${commands}.`);
  context.stderr.say(`${words}\n${commands}.`);
  const keys = [
    { key: 'r', word: 'resume it' },
    { key: 'n', word: 'begin a new one beside it' },
    { key: 'q', word: 'leave' },
  ];
  const key = await context.prompt.key({ message: 'What now?', keys, instead: commands });
  if (key === 'q') return EXIT.notGood;
  return key === 'r' ? resumeRun({ rig: options.rig, unattended: options.unattended, json: options.json }, context, open) : undefined;
}
