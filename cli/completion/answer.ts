import type { Command } from 'commander';
import type { Context } from '../context.js';
import { EXIT } from '../exit-codes.js';
import { complete, type Candidate } from './complete.js';
import { fileNames } from './file-names.js';
import type { Shell } from './shells.js';
import { typedWords, type TypedWord } from './typed-line.js';
import { valuesOn } from './values.js';

/** `?`: bash shows what there is, and inserts nothing (its COMP_TYPE, as a number). */
const SHOWING = '63';

/** Writes what can stand at the cursor, one a line, in the form that the shell's script reads. */
export function answerShell(program: Command, shell: Shell, parts: readonly string[], { home, stdout }: Context): number {
  const [line = '', point = '', type = '', breaks = ''] = parts;
  const words =
    shell === 'bash' ? typedWords(line.slice(0, Number(point))).slice(1) : parts.map((part) => typedWords(part)[0] ?? EMPTY_WORD);
  const typed = words.at(-1) ?? EMPTY_WORD;
  const before = words.slice(0, -1).map(({ text }) => text);
  const { candidates, files, prefix } = complete(program, before, typed.text, valuesOn(home));
  const paths = files ? fileNames(typed.text.slice(prefix.length), files).map((value): Candidate => ({ value, about: '' })) : [];
  const all = [...candidates, ...paths].map(({ value, about }) => ({ value: `${prefix}${value}`, about: about.replaceAll(/\s+/g, ' ') }));
  for (const each of all) stdout.writeExactly(`${lineFor(shell, each, typed, { breaks, showing: type === SHOWING && all.length > 1 })}\n`);
  return EXIT.good;
}

const EMPTY_WORD: TypedWord = { text: '', raw: '', quote: undefined };

function lineFor(
  shell: Shell,
  { value, about }: Candidate,
  typed: TypedWord,
  { breaks, showing }: { breaks: string; showing: boolean },
): string {
  if (shell === 'fish') return `${value}\t${about}`;
  const quoted = typed.quote === undefined && !/^["']/.test(typed.raw) ? value.replaceAll(/[\s"'\\$`&|;<>()*?[\]{}!#]/g, '\\$&') : value;
  if (shell === 'zsh') return `${quoted}\t${about}`;
  return `${quoted.slice(brokenOff(typed, breaks))}${showing && about !== '' ? `  -- ${about}` : ''}`;
}

/** bash begins a new word behind these signs of its own and replaces only that: of `sim:heron` what stands behind the colon. */
function brokenOff({ raw, quote }: TypedWord, breaks: string): number {
  if (quote !== undefined) return 0;
  return Math.max(...[...breaks].filter((sign) => sign === ':' || sign === '=').map((sign) => raw.lastIndexOf(sign) + 1), 0);
}
