import type { Context } from './context.js';
import { NobodyToAskError, UsageError } from './errors.js';

/** A secret from a pipe: the first line of standard input. `option` asked for it, `what` it is. */
export async function firstLineOfInput(
  { stdin, interactive }: Pick<Context, 'stdin' | 'interactive'>,
  { option, what }: { option: string; what: string },
): Promise<string> {
  if (interactive) throw new NobodyToAskError(`${option} reads a pipe.`, `leave it out to be asked for the ${what}`);
  let text = '';
  for await (const chunk of stdin as AsyncIterable<Buffer | string>) {
    text += chunk.toString();
    if (text.includes('\n')) break;
  }
  const line = text.split(/\r?\n/, 1)[0] ?? '';
  if (line === '') throw new UsageError(`Standard input holds no ${what}.`);
  return line;
}
