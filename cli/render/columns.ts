import { toAscii } from './ascii.js';
import type { Style } from '../output.js';

// eslint-disable-next-line no-control-regex -- ESC begins a colour
const COLOURS = /\u001b\[[0-9;]*m/g;

/** Each line of a text wrapped to a width, further in where it was. */
export function wrapLines(text: string, width: number): string {
  return text
    .split('\n')
    .flatMap((line) => {
      const inset = /^ */.exec(line)?.[0] ?? '';
      return widthOf(line) <= width ? [line] : wrap(line, Math.max(20, width - inset.length)).map((piece) => inset + piece);
    })
    .join('\n');
}

/** Where the text of a step begins: behind its number and its kind. */
export const STEP_INDENT = 11;

/** How many columns a text takes; every sign of ours is one wide. */
export const widthOf = (text: string): number => [...text.replace(COLOURS, '')].length;

/** A text as this stream can show it, so that it can be measured before it is padded. */
export const shown = (text: string, { unicode }: Pick<Style, 'unicode'>): string => (unicode ? text : toAscii(text));

export const padRight = (text: string, width: number): string => text + ' '.repeat(Math.max(0, width - widthOf(text)));
export const padLeft = (text: string, width: number): string => ' '.repeat(Math.max(0, width - widthOf(text))) + text;

/** Two texts on one line, the second at the right edge. */
export function spread(left: string, right: string, width: number): string {
  return `${left}${' '.repeat(Math.max(2, width - widthOf(left) - widthOf(right)))}${right}`;
}

/** Cuts a text to a width, colours left whole. */
export function cut(text: string, width: number): string {
  if (widthOf(text) <= width) return text;
  let room = width;
  let out = '';
  // eslint-disable-next-line no-control-regex -- ESC begins a colour
  for (const [piece] of text.matchAll(/\u001b\[[0-9;]*m|./gsu)) {
    if (piece.length > 1 && piece.startsWith('\u001b')) out += piece;
    else if (room > 0) {
      out += piece;
      room -= 1;
    }
  }
  return out;
}

/** Words broken into lines of at most `width` columns. */
export function wrap(text: string, width: number): string[] {
  const lines: string[] = [];
  for (const word of text.split(/\s+/).filter(Boolean)) {
    const last = lines.at(-1);
    if (last !== undefined && widthOf(last) + 1 + widthOf(word) <= width) lines[lines.length - 1] = `${last} ${word}`;
    else lines.push(word);
  }
  return lines.length > 0 ? lines : [''];
}

/** Texts under a step: wrapped, and as far in as the step's title. */
export function indented(texts: readonly string[], columns: number): string[] {
  return texts.flatMap((text) => wrap(text, Math.max(20, columns - STEP_INDENT - 1))).map((line) => ' '.repeat(STEP_INDENT) + line);
}

/** Rows in columns, each as wide as its widest cell; columns whose index is in `right` end at the right. */
export function table(
  rows: readonly (readonly string[])[],
  style: Pick<Style, 'unicode'>,
  { right = [], gap = 2 }: { right?: readonly number[]; gap?: number } = {},
): string[] {
  const cells = rows.map((row) => row.map((cell) => shown(cell, style)));
  const widths = (cells[0] ?? []).map((_cell, column) => Math.max(...cells.map((row) => widthOf(row[column] ?? ''))));
  return cells.map((row) =>
    row
      .map((cell, column) => (right.includes(column) ? padLeft(cell, widths[column] ?? 0) : padRight(cell, widths[column] ?? 0)))
      .join(' '.repeat(gap))
      .trimEnd(),
  );
}
