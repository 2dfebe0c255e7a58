import { readFile } from 'node:fs/promises';
import { isReadable, decodeCapture } from '../../shared/decode/decode-capture.js';
import { codingReader } from '../../shared/decode/codings.js';
import type { DecodeAnswer } from '../../shared/decode/answer.js';
import { BadInputError } from '../../shared/errors.js';
import { readCapture } from '../../shared/lamps/read-capture.js';
import { readSheet } from '../../shared/sheet/read-sheet.js';
import type { Sheet } from '../../shared/sheet/schema.js';
import { decodeInWords } from '../render/decode-words.js';

/** As typed: the confidence is still text. */
export interface DecodeOptions {
  sheet: string;
  files: string[];
  minConfidence?: string | undefined;
  json?: boolean | undefined;
}

export interface DecodeStreams {
  stdout: { write(text: string): unknown };
  stderr: { write(text: string): unknown };
}

const GOOD = 0;
const UNREADABLE = 1;
const WRONG_USAGE = 2;
const BAD_INPUT = 3;

/** Decodes capture files with a sheet, prints the answers, and returns the exit code (contract, sections 3 and 5). */
export async function runDecode(options: DecodeOptions, io: DecodeStreams): Promise<number> {
  const minConfidence = readConfidence(options.minConfidence);
  if (minConfidence === null) {
    io.stderr.write(`--min-confidence is '${options.minConfidence}': give a probability from 0 to 1, like 0.999.\n`);
    return WRONG_USAGE;
  }
  let sheet: Sheet;
  try {
    sheet = readSheet(await readText(options.sheet), options.sheet);
    codingReader(sheet.coding.kind);
  } catch (error) {
    if (!(error instanceof BadInputError)) throw error;
    io.stderr.write(`Can't use this sheet: ${placed(error, options.sheet)}\n`);
    return BAD_INPUT;
  }
  let exitCode = GOOD;
  for (const file of options.files) {
    try {
      const answer = decodeCapture(readCapture(await readText(file), file), sheet, minConfidence === undefined ? {} : { minConfidence });
      io.stdout.write(options.json === true ? answerLine(file, answer) : decodeInWords(file, answer, sheet));
      if (!isReadable(answer)) exitCode = Math.max(exitCode, UNREADABLE);
    } catch (error) {
      if (!(error instanceof BadInputError)) throw error;
      exitCode = BAD_INPUT;
      if (options.json === true) io.stdout.write(errorLine(file, error));
      else io.stderr.write(`Can't read this capture: ${placed(error, file)}\n`);
    }
  }
  return exitCode;
}

/** undefined: not given; null: no probability. */
function readConfidence(text: string | undefined): number | null | undefined {
  if (text === undefined) return undefined;
  const value = Number(text);
  return text.trim() !== '' && value >= 0 && value <= 1 ? value : null;
}

async function readText(file: string): Promise<string> {
  try {
    return await readFile(file, 'utf8');
  } catch (error) {
    const code = error instanceof Error && 'code' in error ? String(error.code) : 'unknown';
    const why =
      { ENOENT: 'there is no such file', EISDIR: 'this is a folder, not a file', EACCES: 'reading it is not allowed' }[code] ??
      `it can't be read (${code})`;
    throw new BadInputError(why, { file });
  }
}

function answerLine(file: string, answer: DecodeAnswer): string {
  return `${JSON.stringify({ file, ...answer })}\n`;
}

function errorLine(file: string, error: BadInputError): string {
  return `${JSON.stringify({ file, error: { ...(error.line === undefined ? {} : { line: error.line }), reason: error.message } })}\n`;
}

function placed(error: BadInputError, file: string): string {
  return `${file}${error.line === undefined ? '' : `, line ${error.line}`}: ${error.message}.`;
}
