import { Help, type Argument, type Command, type Option } from 'commander';
import type { Values } from './values.js';

/** Something that can stand at the cursor. */
export interface Candidate {
  value: string;
  about: string;
}

export interface Completion {
  candidates: Candidate[];
  /** File names too, ending in one of these (`*`: any). */
  files?: readonly string[] | undefined;
  /** What stands before each candidate in the word that is typed: `--rig=`. */
  prefix: string;
}

/**
 * What can stand at the cursor, read off the commander tree: commands, options, choices, and values by the kind of an argument.
 * `words` are those before the cursor, without the program's own name; `typed` is the one being typed.
 */
export function complete(program: Command, words: readonly string[], typed: string, values: Values): Completion {
  const place = walk(program, words);
  const { command, awaits } = place;
  const inline = /^(--[^=]+)=(.*)$/s.exec(typed);
  if (awaits) return valuesOf(awaits, place, typed, '', values);
  if (inline && !place.onlyOperands) {
    const option = command.options.find(({ long }) => long === inline[1]);
    return option && takesValue(option) ? valuesOf(option, place, inline[2] ?? '', `${inline[1] ?? ''}=`, values) : NOTHING;
  }
  if (typed.startsWith('-') && !place.onlyOperands) return { candidates: fitting(optionsOf(place), typed), prefix: '' };
  if (command.commands.length > 0) {
    const commands = new Help().visibleCommands(command).map((each) => ({ value: each.name(), about: each.description() }));
    return { candidates: place.operands.length === 0 ? fitting(commands, typed) : [], prefix: '' };
  }
  const argument = argumentAt(command, place.operands.length);
  if (argument) return valuesOf(argument, place, typed, '', values);
  // Nothing more can be named: what is left are options.
  return { candidates: typed === '' ? fitting(optionsOf(place), typed) : [], prefix: '' };
}

const NOTHING: Completion = { candidates: [], prefix: '' };

/** Where the cursor stands in the tree. */
export interface Place {
  command: Command;
  operands: string[];
  /** The options that stand on the line already. */
  given: ReadonlySet<Option>;
  /** The option whose value comes next. */
  awaits: Option | undefined;
  onlyOperands: boolean;
}

function walk(program: Command, words: readonly string[]): Place {
  const given = new Set<Option>();
  const place: Place = { command: program, operands: [], given, awaits: undefined, onlyOperands: false };
  for (const word of words) {
    if (place.awaits) place.awaits = undefined;
    else if (word === '--' && !place.onlyOperands) place.onlyOperands = true;
    else if (word.startsWith('-') && word !== '-' && !place.onlyOperands) {
      const [name = ''] = word.split('=', 1);
      const option = place.command.options.find(({ long, short }) => long === name || short === name);
      if (!option) continue;
      given.add(option);
      if (option.required && !word.includes('=')) place.awaits = option;
    } else {
      const child = place.operands.length === 0 ? place.command.commands.find((each) => each.name() === word) : undefined;
      if (child) place.command = child;
      else place.operands.push(word);
    }
  }
  return place;
}

const takesValue = (option: Option): boolean => option.required || option.optional;

/** Those that must be there and are not come first. */
function optionsOf({ command, given }: Place): Candidate[] {
  return new Help()
    .visibleOptions(command)
    .filter((option) => option.variadic || !given.has(option))
    .sort((a, b) => Number(b.mandatory) - Number(a.mandatory))
    .map(({ long, short, description }) => ({ value: long ?? short ?? '', about: description }));
}

function argumentAt({ registeredArguments }: Command, index: number): Argument | undefined {
  const last = registeredArguments.at(-1);
  return registeredArguments[index] ?? (last?.variadic === true ? last : undefined);
}

function valuesOf(of: Argument | Option, place: Place, typed: string, prefix: string, values: Values): Completion {
  const choices = of.argChoices?.map((choice) => ({ value: choice, about: '' }));
  const { candidates, files } = choices ? { candidates: choices, files: undefined } : values(of, place);
  return { candidates: fitting(candidates, typed), files, prefix };
}

const fitting = (candidates: readonly Candidate[], typed: string): Candidate[] =>
  candidates.filter(({ value }) => value.toLowerCase().startsWith(typed.toLowerCase()));
