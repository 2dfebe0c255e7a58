import type { Argument, Option } from 'commander';
import { keptChecks, keptFamilies, keptUnits } from '../bench/kept-units.js';
import { scriptFiles } from '../bench/script-files.js';
import { filesIn, type Home } from '../home.js';
import { BUILT_IN_SCENARIOS } from '../instruments/simulated/scenarios/built-in.js';
import { unitNumberText } from '../render/words.js';
import { unitNumber } from '../tree/parts.js';
import type { Candidate, Place } from './complete.js';

export interface PossibleValues {
  candidates: readonly Candidate[];
  files?: readonly string[] | undefined;
}
export type Values = (of: Argument | Option, place: Place) => PossibleValues;

const ANY_FILE = ['*'];
const YAML = ['yaml', 'yml'];
const SHEETS = [...YAML, 'json'];
const plain = (values: readonly string[], about = ''): PossibleValues => ({ candidates: values.map((value) => ({ value, about })) });

/** What each kind of argument can be, by the name it has in the tree between its brackets. Names that are not here are free text. */
const KINDS: Readonly<Record<string, (home: Home, place: Place) => PossibleValues>> = {
  unit: (home) => ({
    candidates: keptUnits(home).units.map(({ number, machine, stage }) => ({
      value: unitNumberText(number),
      about: `${machine}, ${stage}`,
    })),
  }),
  script: (home) => ({ candidates: scriptFiles(home).map(({ name, file }) => ({ value: name, about: file })), files: YAML }),
  check: (home, place) => {
    const at = place.command.registeredArguments.findIndex(({ parseArg }) => parseArg === unitNumber);
    const number = Number(place.operands[at]);
    const family = keptUnits(home).units.find((unit) => unit.number === number)?.family;
    return { candidates: keptChecks(home, family ?? '').map(({ id, title }) => ({ value: id, about: title })) };
  },
  family: (home) => plain(keptFamilies(home)),
  run: (home) => plain(namesIn(home, ['journal'], /^(.{36})\.ndjson$/), 'bench run'),
  entry: (home) => plain(namesIn(home, ['journal', 'outbox'], /^(.{36})\.json$/), 'waits to be sent'),
  rig: () => ({
    ...plain(
      Object.keys(BUILT_IN_SCENARIOS).map((name) => `sim:${name}`),
      'simulated instruments',
    ),
    files: YAML,
  }),
  sheet: () => ({ candidates: [], files: SHEETS }),
  file: () => ({ candidates: [], files: ANY_FILE }),
};

/** The values that this bench knows of, from its own disk: completion never waits for the network. */
export function valuesOn(home: Home): Values {
  return (of, place) => {
    return KINDS[nameOf(of)]?.(home, place) ?? plain([]);
  };
}

/** `<script>`, `[run]`, `--rig <rig>`: the word between the brackets. */
function nameOf(of: Argument | Option): string {
  if (!('flags' in of)) return of.name();
  const name = /[<[]([\w-]+)/.exec(of.flags)?.[1] ?? '';
  // The unit of a measured value.
  return name === 'unit' && of.parseArg !== (unitNumber as unknown) ? '' : name;
}

/** The ids that files of the journal are named by, the newest first: they begin with their time. */
function namesIn(home: Home, folder: readonly string[], pattern: RegExp): string[] {
  return filesIn(home.path(...folder))
    .flatMap((name) => pattern.exec(name)?.[1] ?? [])
    .reverse();
}
