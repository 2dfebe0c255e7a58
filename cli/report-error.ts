import { BadInputError } from '../shared/errors.js';
import type { Context } from './context.js';
import { ApiProblemError, ServerError, StoppedError, UsageError } from './errors.js';
import { EXIT } from './exit-codes.js';
import { writeWhole } from './home.js';
import { InstrumentError } from './instruments/instrument-error.js';

/** The exit code an error ends the program with. What is none of ours is a fault of Refettle itself. */
export function exitCodeOf(error: unknown): number {
  if (error instanceof UsageError) return EXIT.usage;
  if (error instanceof StoppedError) return EXIT.stopped;
  if (error instanceof BadInputError) return EXIT.badInput;
  if (error instanceof InstrumentError) return EXIT.instrument;
  if (error instanceof ServerError) return EXIT.server;
  return EXIT.fault;
}

/** Says on standard error what happened, where, and what to do; gives the exit code. */
export function reportError(error: unknown, context: Pick<Context, 'stderr' | 'home' | 'now'>): number {
  const code = exitCodeOf(error);
  context.stderr.say(code === EXIT.fault ? faultReport(error, context) : wordsOf(error));
  return code;
}

/** What an error says to a person. */
export function wordsOf(error: unknown): string {
  if (error instanceof BadInputError) {
    const where = [error.file, error.line === undefined ? undefined : `line ${error.line}`].filter(Boolean).join(', ');
    return where ? `${where}: ${ended(error.message)}` : ended(capital(error.message));
  }
  if (error instanceof InstrumentError) return `${ended(error.message)}\n${error.toDo}`;
  if (error instanceof ApiProblemError) {
    const fields = error.errors.map(
      ({ pointer, reason }) => `\n  ${pointer.replace(/^\//, '').replaceAll('/', '.') || 'request'}: ${reason}`,
    );
    return `The server refuses. ${ended(error.message)}${fields.join('')}\n${ended(capital(error.remedy))}`;
  }
  if (error instanceof ServerError) return `${ended(error.message)}\n${ended(error.remedy)}`;
  if (error instanceof UsageError) return ended(error.message);
  return error instanceof Error ? ended(error.message) : String(error);
}

/** A full stop, unless the text ends with one or with a command that is to be typed. */
export const ended = (text: string): string => (/[.!?]$|refettle [a-z -]+$/.test(text) ? text : `${text}.`);
export const capital = (text: string): string => text.charAt(0).toUpperCase() + text.slice(1);

/** A fault of ours: the details go to a file, the terminal says where it is and what became of the work. */
function faultReport(error: unknown, { home, now }: Pick<Context, 'home' | 'now'>): string {
  const at = now().toISOString();
  const file = home.path('reports', `${at.replaceAll(':', '-')}.txt`);
  const details = error instanceof Error ? (error.stack ?? error.message) : String(error);
  const versions = `node ${process.version}, ${process.platform} ${process.arch}`;
  let kept: string;
  try {
    writeWhole(file, `${at}\n${versions}\n${process.argv.slice(2).join(' ')}\n\n${details}\n`);
    kept = `The report is in ${file}`;
  } catch {
    kept = `The report could not be written down: ${details.split('\n')[0] ?? ''}`;
  }
  return `This is a fault of Refettle itself. Nothing that was recorded is lost: it is in ${home.path('journal')}, and 'refettle sync' sends it.\n${kept}`;
}
