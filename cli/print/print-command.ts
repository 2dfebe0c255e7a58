import type { PaperPage } from '../../shared/paper/pages.js';
import { UsageError } from '../errors.js';
import type { Environment } from '../home.js';

/** The program that takes a file to a printer: words of a command line, never a shell's. */
export interface PrintCommand {
  program: string;
  words: readonly string[];
}

export interface PrintOrder {
  /** The whole path of the PDF. */
  file: string;
  title: string;
  size: Pick<PaperPage, 'widthMm' | 'heightMm'>;
  printer?: string | undefined;
}

/** A printer's name as CUPS and most others have it: never an option, never two words. */
const PRINTER_NAME = /^[\p{L}\p{N}_][\p{L}\p{N}_.@:/+-]{0,126}$/u;

/**
 * How an order is printed. `REFETTLE_PRINT` is a command line: words parted by blanks (a backslash keeps a blank in a word), with the file
 * as `{file}` or at its end, and the printer as `{printer}`. Without it, `lp` of the system.
 */
export async function printCommand(order: PrintOrder, env: Environment): Promise<PrintCommand> {
  const { printer } = order;
  if (printer !== undefined && !PRINTER_NAME.test(printer))
    throw new UsageError(`--printer: '${printer}' is no printer's name. 'lpstat -e' lists the printers of this machine.`);
  const line = env['REFETTLE_PRINT']?.trim();
  if (!line) return { program: 'lp', words: lpWords(order) };
  const { parseCommandString } = await import('execa');
  const [program, ...words] = parseCommandString(line);
  if (program === undefined) return { program: 'lp', words: lpWords(order) };
  const takesPrinter = words.some((word) => word.includes('{printer}'));
  if (printer !== undefined && !takesPrinter)
    throw new UsageError(
      '--printer: the command in REFETTLE_PRINT has no {printer}, so it cannot be told which one. Put it in, or leave --printer out.',
    );
  if (printer === undefined && takesPrinter) throw new UsageError('REFETTLE_PRINT has a {printer}: say which one with --printer NAME.');
  const takesFile = words.some((word) => word.includes('{file}'));
  const filled = words.map((word) => word.replaceAll('{printer}', () => printer ?? '').replaceAll('{file}', () => order.file));
  return { program, words: takesFile ? filled : [...filled, order.file] };
}

/** `lp` of CUPS, told the size of the paper and not to scale. */
function lpWords({ file, title, size, printer }: PrintOrder): string[] {
  const media = `media=${mediaOf(size)}`;
  return [...(printer === undefined ? [] : ['-d', printer]), '-t', title, '-o', media, '-o', 'print-scaling=none', file];
}

/** Sizes that printers know by name (PWG 5101.1 has them by size too); others as CUPS writes custom ones. */
const NAMED_MEDIA: Readonly<Record<string, string>> = { '105x148': 'A6', '210x297': 'A4', '215.9x279.4': 'Letter' };

function mediaOf({ widthMm, heightMm }: PrintOrder['size']): string {
  const size = `${widthMm}x${heightMm}`;
  return NAMED_MEDIA[size] ?? `Custom.${size}mm`;
}
