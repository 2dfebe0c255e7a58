import { BadInputError } from '../../shared/errors.js';
import { formatLimits, formatReading, formatSpread } from '../../shared/measure/format-reading.js';
import { judge, type Judgement, type ReadingVerdict } from '../../shared/measure/judge.js';
import { parseAccuracy } from '../../shared/measure/parse-accuracy.js';
import { parseQuantity } from '../../shared/measure/parse-quantity.js';

/** As typed: every figure is still text. */
export interface JudgeOptions {
  value: string;
  unit: string;
  low?: string | undefined;
  high?: string | undefined;
  accuracy: string;
  resolution: string;
  coverage?: string | undefined;
  json?: boolean | undefined;
}

export interface JudgeStreams {
  stdout: { write(text: string): unknown };
  stderr: { write(text: string): unknown };
}

const VERDICT_SIGNS: Readonly<Record<ReadingVerdict, string>> = { pass: '■ pass', fail: '✕ fail', inconclusive: '◧ inconclusive' };

/** Judges one reading, prints the answer, and returns the exit code (contract, sections 4 and 5). */
export function runJudge(options: JudgeOptions, io: JudgeStreams): Promise<number> {
  if (options.low === undefined && options.high === undefined) {
    io.stderr.write('There is nothing to judge against: give --low, --high, or both.\n');
    return Promise.resolve(2);
  }
  let judgement: Judgement;
  let resolution: number;
  try {
    resolution = named('--resolution', () => parseQuantity(options.resolution));
    judgement = judge({
      value: named('--value', () => parseQuantity(options.value)),
      unit: options.unit,
      low: optional('--low', options.low),
      high: optional('--high', options.high),
      accuracy: named('--accuracy', () => parseAccuracy(options.accuracy)),
      resolution,
      coverageFactor: optional('--coverage', options.coverage),
    });
  } catch (error) {
    if (!(error instanceof BadInputError)) throw error;
    if (options.json === true) io.stdout.write(`${JSON.stringify({ error: { reason: error.message } })}\n`);
    io.stderr.write(`Can't judge this: ${error.message}.\n`);
    return Promise.resolve(3);
  }
  io.stdout.write(options.json === true ? `${JSON.stringify(judgement)}\n` : `${inWords(judgement, resolution)}\n`);
  return Promise.resolve(judgement.verdict === 'pass' ? 0 : 1);
}

function inWords(judgement: Judgement, resolution: number): string {
  const { value, unit, low, high, expandedUncertainty, verdict } = judgement;
  return [
    formatReading(value, resolution, unit),
    formatSpread(expandedUncertainty, resolution),
    '',
    formatLimits(low, high, unit, resolution),
    '',
    VERDICT_SIGNS[verdict],
  ].join(' ');
}

function optional(option: string, text: string | undefined): number | undefined {
  return text === undefined ? undefined : named(option, () => parseQuantity(text));
}

function named<T>(option: string, parse: () => T): T {
  try {
    return parse();
  } catch (error) {
    throw error instanceof BadInputError ? new BadInputError(`${option}: ${error.message}`) : error;
  }
}
