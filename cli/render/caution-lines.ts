import type { Style } from '../output.js';
import { wrap } from './columns.js';

/** Under the words of a step; CAUTION and its blanks fill it. */
const INDENT = ' '.repeat(11);

/** A caution as it stands on every screen: the word reversed, its text beside it. */
export function cautionLines(text: string, { ink, columns }: Pick<Style, 'ink' | 'columns'>): string[] {
  const [first = '', ...rest] = wrap(text, Math.max(20, columns - INDENT.length - 1));
  return [`${ink.inverse(' CAUTION ')}  ${first}`, ...rest.map((line) => `${INDENT}${line}`)];
}
