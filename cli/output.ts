import type { ChalkInstance } from 'chalk';
import type { Environment } from './home.js';
import { toAscii } from './render/ascii.js';
import { wrapLines } from './render/columns.js';

/** What a command writes to: a terminal, a pipe or a file. */
export interface RawOutput {
  write(text: string): unknown;
  readonly isTTY?: boolean | undefined;
  readonly columns?: number | undefined;
  readonly rows?: number | undefined;
}

export interface Output {
  /** Text for people. Where the locale has no UTF-8, signs become plain letters. */
  write(text: string): void;
  /** Sentences, with a line end: on a terminal no word is broken at its edge. */
  say(text: string): void;
  /** As it is, for programs: JSON is UTF-8 everywhere. */
  writeExactly(text: string): void;
  readonly isTerminal: boolean;
  readonly columns: number;
  readonly rows: number;
  readonly colourLevel: 0 | 1;
  readonly unicode: boolean;
  /** The chalk of this stream, loaded when something is to be drawn. */
  style(): Promise<Style>;
}

/** How words are dressed on one stream. */
export interface Style {
  readonly ink: ChalkInstance;
  readonly unicode: boolean;
  readonly columns: number;
}

/** Where the terminal doesn't say, or says 0, as one does that nobody has given a size. */
const USUAL_COLUMNS = 80;
const USUAL_ROWS = 24;

/** Colour only on a terminal, never with NO_COLOR (contract, section 5; no-color.org: set and not empty). */
export function colourLevelOf(isTerminal: boolean, env: Environment): 0 | 1 {
  return isTerminal && !env['NO_COLOR'] && env['TERM'] !== 'dumb' ? 1 : 0;
}

/** Whether the locale is UTF-8: the first of these that is set decides (POSIX, 8.2). */
export function isUtf8(env: Environment): boolean {
  const locale = env['LC_ALL'] || env['LC_CTYPE'] || env['LANG'] || '';
  return /utf-?8/i.test(locale);
}

export function outputOn(stream: RawOutput, env: Environment): Output {
  const isTerminal = stream.isTTY === true;
  const colourLevel = colourLevelOf(isTerminal, env);
  const unicode = isUtf8(env);
  let ink: ChalkInstance | undefined;
  const write = (text: string): void => void stream.write(unicode ? text : toAscii(text));
  return {
    write,
    say: (text) => write(`${isTerminal ? wrapLines(text, (stream.columns || USUAL_COLUMNS) - 1) : text}\n`),
    writeExactly: (text) => void stream.write(text),
    isTerminal,
    get columns() {
      return stream.columns || USUAL_COLUMNS;
    },
    get rows() {
      return stream.rows || USUAL_ROWS;
    },
    colourLevel,
    unicode,
    async style() {
      const { Chalk } = await import('chalk');
      ink ??= new Chalk({ level: colourLevel });
      return {
        ink,
        unicode,
        // Asked for at each drawing: a terminal may be resized.
        get columns() {
          return stream.columns || USUAL_COLUMNS;
        },
      };
    },
  };
}
