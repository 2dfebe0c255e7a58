import { existsSync } from 'node:fs';
import { keepUnits, keptChecks, keptUnits, type KeptUnit } from '../bench/kept-units.js';
import { readScript } from '../bench/read-script.js';
import { scriptFiles } from '../bench/script-files.js';
import type { Context } from '../context.js';
import { ServerUnreachableError } from '../errors.js';
import { readIfThere } from '../home.js';
import { RIG_FILE } from '../instruments/rig-file.js';
import { BUILT_IN_SCENARIOS } from '../instruments/simulated/scenarios/built-in.js';
import { cut, padRight } from '../render/columns.js';
import { dayText, timeText, unitNumberText } from '../render/words.js';

/** Every choice here gives undefined where Escape was pressed: back. */
type Chosen<T> = Promise<T | undefined>;

const INSTEAD = 'run the command itself: refettle --help lists them';
/** The largest page of the API: a bench looks for one machine, not for all that ever were. */
const NEWEST = 200;
/** Columns that the pointer, the number and the edge of the screen take. */
const ROUND_A_NAME = 8;

/** The newest units: from the server, or as this bench last saw them, and then that is said. */
export async function unitsKnown(context: Context): Promise<KeptUnit[]> {
  try {
    const { items } = await (await context.api()).call('listUnits', { query: { limit: NEWEST } });
    keepUnits(context.home, items, context.now());
    return keptUnits(context.home).units;
  } catch (error) {
    if (!(error instanceof ServerUnreachableError)) throw error;
    const { at, units } = keptUnits(context.home);
    if (units.length === 0) throw error;
    const since = at === undefined ? 'those this bench has worked on' : `as they were on ${dayText(at)}, ${timeText(at)}`;
    context.stderr.say(`The server at ${context.server} can't be reached: these are the units ${since}.`);
    return units;
  }
}

/** A unit of the list, or any other by its number. */
export async function chooseUnit(context: Context, message: string, units: readonly KeptUnit[]): Chosen<number> {
  const answer = await context.prompt.pick({
    message,
    choices: units.map((unit) => ({ value: String(unit.number), name: unitLine(unit, context) })),
    search: (typed) => {
      const digits = /^\d{1,9}$/.test(typed) && Number(typed) > 0 ? Number(typed) : undefined;
      return digits === undefined ? undefined : { value: String(digits), name: `${unitNumberText(digits)}  (not on this list)` };
    },
    instead: INSTEAD,
  });
  return answer === undefined ? undefined : Number(answer);
}

function unitLine({ number, machine, stage, waitsFor }: KeptUnit, { stderr }: Context): string {
  return cut(
    `${unitNumberText(number)}  ${padRight(machine, 20)}  ${padRight(stage, 10)}  ${waitsFor ?? ''}`.trimEnd(),
    stderr.columns - ROUND_A_NAME,
  );
}

/** A bench script by its name; those of the unit's family first, and only those where the family is known. */
export async function chooseScript(context: Context, family: string | undefined): Chosen<string> {
  const scripts = scriptFiles(context.home).flatMap(({ name, file }) => {
    try {
      const script = readScript(readIfThere(file) ?? '', file);
      return family === undefined || script.family === family ? [{ name, file, title: script.title }] : [];
    } catch {
      return [{ name, file, title: 'can’t be read as a bench script' }];
    }
  });
  const folder = context.home.path('scripts');
  if (scripts.length === 0) {
    context.stderr.say(
      `There is no bench script${family === undefined ? '' : ` for ${family}`} yet. Put one into ${folder}, or run it by its file: refettle run FILE UNIT`,
    );
    return undefined;
  }
  return context.prompt.pick({
    message: `Which script (more go into ${folder})`,
    // A file of that name in the working folder would be taken for it.
    choices: scripts.map(({ name, file, title }) => ({ value: existsSync(name) ? file : name, name: `${padRight(name, 16)}  ${title}` })),
    instead: INSTEAD,
  });
}

/** The words that say which rig: none where the bench has a rig file, one of the simulated ones otherwise. */
export async function chooseRig(context: Context): Chosen<string[]> {
  if (existsSync(context.home.path(RIG_FILE))) return [];
  context.stderr.say(`This bench has no rig file yet (${context.home.path(RIG_FILE)}): refettle rig check writes one.`);
  const rig = await context.prompt.pick({
    message: 'Which simulated rig',
    choices: Object.keys(BUILT_IN_SCENARIOS).map((name) => ({ value: `sim:${name}`, name: `sim:${name}` })),
    instead: 'give it with --rig',
  });
  return rig === undefined ? undefined : ['--rig', rig];
}

/** A check of the unit's sheet, as the sheet was kept. */
export async function chooseCheck(context: Context, family: string): Chosen<{ id: string; kind: string }> {
  const checks = keptChecks(context.home, family);
  const answer = await context.prompt.pick({
    message: 'Which check',
    choices: checks.map(({ id, title }) => ({ value: id, name: title })),
    instead: INSTEAD,
  });
  return checks.find(({ id }) => id === answer);
}

/** A few things, each with a number. */
export async function chooseOf<T extends string>(
  context: Context,
  message: string,
  choices: readonly (readonly [value: T, name: string])[],
): Chosen<T> {
  const answer = await context.prompt.pick({ message, choices: choices.map(([value, name]) => ({ value, name })), instead: INSTEAD });
  return choices.find(([value]) => value === answer)?.[0];
}
