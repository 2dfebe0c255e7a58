import { writeFileSync } from 'node:fs';
import { resolve } from 'node:path';
import type { Paper } from '../../shared/paper/pages.js';
import type { Context } from '../context.js';
import { UsageError } from '../errors.js';
import { EXIT } from '../exit-codes.js';
import { notWritable } from '../home.js';
import { capital } from '../report-error.js';
import { keepPdf, type KeptPdf } from './keep-pdf.js';
import { printFile } from './print-file.js';

export interface PaperOptions {
  /** Where the PDF is to be. */
  pdf?: string;
  print?: boolean;
  printer?: string;
}

/** What became of the paper, for people and for programs. */
export interface PutOnPaper {
  code: number;
  /** For `--json`: nothing where no paper was asked for. */
  answer: { pdf?: string; printed?: { done: boolean; job?: string | undefined; why?: string } };
}

export const wantsPaper = ({ pdf, print }: PaperOptions): boolean => pdf !== undefined || print === true;

/** Wrong usage is found before anything is asked of the server. */
export function checkPaperOptions({ print, printer }: PaperOptions): void {
  if (printer !== undefined && print !== true) throw new UsageError('--printer says where to print: add --print.');
}

/**
 * Writes the PDF, and hands it to the printer where that is asked for. A print that fails says so, names the file that is kept, and ends
 * with 4: a device on the bench did not do its part.
 */
export async function putOnPaper(
  { paper, name, options, what, size: sizeName }: { paper: Paper; name: string; options: PaperOptions; what: string; size: string },
  context: Context,
): Promise<PutOnPaper> {
  const { stderr } = context;
  const { paperPdf } = await import('../render/paper-pdf.js');
  const bytes = await paperPdf(paper, context.now());
  const { file, done } = options.pdf === undefined ? keepPdf(context.home, name, bytes) : writePdf(resolve(options.pdf), bytes);
  if (options.pdf !== undefined) stderr.say(`${capital(what)} in ${options.pdf}: ${sizeName}, print it at 100 %.`);
  if (options.print !== true) return { code: EXIT.good, answer: { pdf: file } };

  const [size = { widthMm: 0, heightMm: 0 }] = paper.pages;
  const outcome = await printFile({ file, title: paper.title, size, printer: options.printer }, context).finally(done);
  if (!outcome.printed) {
    stderr.say(`Not printed: ${outcome.why}. ${outcome.toDo}.\nNothing is lost: the PDF is in ${file}`);
    const code = context.interruption.interrupted ? EXIT.stopped : EXIT.instrument;
    return { code, answer: { pdf: file, printed: { done: false, why: outcome.why } } };
  }
  const job = outcome.job === undefined ? outcome.answer : `job ${outcome.job}`;
  stderr.say(`${capital(what)} at the printer${job === '' ? '' : `: ${job}`}.`);
  return { code: EXIT.good, answer: { pdf: file, printed: { done: true, ...(outcome.job === undefined ? {} : { job: outcome.job }) } } };
}

/** Where somebody wants it; it stays there. */
function writePdf(file: string, bytes: Uint8Array): KeptPdf {
  try {
    writeFileSync(file, bytes);
  } catch (error) {
    throw notWritable(file, error);
  }
  return { file, done: () => undefined };
}
