import { InvalidArgumentError, Option } from 'commander';
import type { Context } from '../context.js';

/** An action of a command: `load` imports the file that does it, only when it runs. */
export type Does = <O>(load: () => Promise<(options: O, context: Context) => Promise<number>>) => (options: O) => Promise<void>;

/** Every command that answers has it: `.option(...JSON_OPTION)`. */
export const JSON_OPTION = ['--json', 'answer in JSON, for programs'] as const;
export const RIG_OPTION = ['--rig <rig>', 'rig file, or sim:NAME for simulated instruments (else rig.yaml in REFETTLE_HOME)'] as const;

/** An option with a few values, of which any case will do; the help text and completion list them. */
export function oneOf(flags: string, description: string, choices: readonly string[]): Option {
  return new Option(flags, description).choices(choices).argParser((text: string) => {
    const known = choices.find((choice) => choice.toLowerCase() === text.toLowerCase());
    if (known === undefined) throw new InvalidArgumentError(`It is none of ${choices.join(', ')}.`);
    return known;
  });
}

/** `412`, `0412` and `No. 0412` are the same unit. */
export function unitNumber(text: string): number {
  const digits = /^(?:no\.?\s*)?(\d{1,9})$/i.exec(text.trim())?.[1];
  if (digits === undefined || Number(digits) === 0) throw new InvalidArgumentError('A unit number is digits, like 0412.');
  return Number(digits);
}

export function plainNumber(text: string): number {
  const value = /^\d+(\.\d+)?$/.test(text) ? Number(text) : NaN;
  if (!Number.isFinite(value)) throw new InvalidArgumentError('Write a plain number, like 230 or 0.5.');
  return value;
}
