import { mkdirSync, readdirSync, rmSync, statSync, writeFileSync } from 'node:fs';
import { dirname, join, resolve } from 'node:path';
import type { Paper } from '../../shared/paper/pages.js';
import type { Context } from '../context.js';
import { UsageError } from '../errors.js';
import { EXIT } from '../exit-codes.js';
import { notWritable } from '../home.js';
import { capital } from '../report-error.js';
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

/** PDFs that were printed stay on the bench for a while, so that one can be printed again without the server. */
const KEPT_PDFS = 40;

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
  const { stderr, home } = context;
  const { paperPdf } = await import('../render/paper-pdf.js');
  const bytes = await paperPdf(paper, context.now());
  const file = options.pdf === undefined ? home.path('paper', `${name}.pdf`) : resolve(options.pdf);
  try {
    if (options.pdf === undefined) mkdirSync(dirname(file), { recursive: true, mode: 0o700 });
    writeFileSync(file, bytes, options.pdf === undefined ? { mode: 0o600 } : {});
  } catch (error) {
    throw notWritable(file, error);
  }
  if (options.pdf === undefined) dropOldest(dirname(file));
  if (options.pdf !== undefined) stderr.say(`${capital(what)} in ${options.pdf}: ${sizeName}, print it at 100 %.`);
  if (options.print !== true) return { code: EXIT.good, answer: { pdf: file } };

  const [size = { widthMm: 0, heightMm: 0 }] = paper.pages;
  const outcome = await printFile({ file, title: paper.title, size, printer: options.printer }, context);
  if (!outcome.printed) {
    stderr.say(`Not printed: ${outcome.why}. ${outcome.toDo}.\nNothing is lost: the PDF is in ${file}`);
    const code = context.interruption.interrupted ? EXIT.stopped : EXIT.instrument;
    return { code, answer: { pdf: file, printed: { done: false, why: outcome.why } } };
  }
  const job = outcome.job === undefined ? outcome.answer : `job ${outcome.job}`;
  stderr.say(`${capital(what)} at the printer${job === '' ? '' : `: ${job}`}.`);
  return { code: EXIT.good, answer: { pdf: file, printed: { done: true, ...(outcome.job === undefined ? {} : { job: outcome.job }) } } };
}

function dropOldest(folder: string): void {
  const files = readdirSync(folder)
    .filter((name) => name.endsWith('.pdf'))
    .map((name) => ({ path: join(folder, name), at: statSync(join(folder, name)).mtimeMs }))
    .sort((a, b) => b.at - a.at);
  for (const { path } of files.slice(KEPT_PDFS)) rmSync(path, { force: true });
}
