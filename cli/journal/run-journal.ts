import { z } from 'zod';
import { BadInputError } from '../../shared/errors.js';
import { personRefSchema } from '../../shared/history/events.js';
import { runLogSchema, stepResultSchema, type RunLog, type StepResult } from '../../shared/script/run-log.js';
import { readIfThere, type Home } from '../home.js';
import { parseJson } from '../session.js';
import { AppendFile } from './append-file.js';
import { captureFileOf, captureText } from './capture-file.js';

const headerSchema = z.strictObject({
  id: z.uuid(),
  server: z.string(),
  unit: z.number().int(),
  by: personRefSchema,
  script: runLogSchema.shape.script,
  rig: runLogSchema.shape.rig,
  startedAt: z.iso.datetime(),
  /** The process that writes here: while it lives, nobody else closes the run. */
  pid: z.number().int(),
});
export type RunHeader = z.infer<typeof headerSchema>;

const begunSchema = z.strictObject({
  stepId: z.string(),
  kind: z.string(),
  title: z.string(),
  at: z.iso.datetime(),
  captureId: z.string().optional(),
});
export type BegunStep = z.infer<typeof begunSchema>;
const endSchema = z.strictObject({ endedAt: z.iso.datetime(), interrupted: z.boolean() });

const lineSchema = z.union([
  z.strictObject({ run: headerSchema }),
  z.strictObject({ begin: begunSchema }),
  z.strictObject({ step: stepResultSchema }),
  z.strictObject({ end: endSchema }),
]);

export const journalFileOf = (home: Home, runId: string): string => home.path('journal', `${runId}.ndjson`);

/** What a run on this bench has written down so far. */
export interface WrittenRun {
  header: RunHeader;
  results: StepResult[];
  /** The step that had begun and has no result yet. */
  begun: BegunStep | undefined;
  end: z.infer<typeof endSchema> | undefined;
}

/** Only these hold a capture file; its text is kept beside the journal, not in it. */
const withoutFile = (result: StepResult): StepResult =>
  result.kind === 'capture' || result.kind === 'watch' ? { ...result, file: '' } : result;

/** The journal of a run that is going. Each step's result is on the disk before the next begins. */
export class RunJournal {
  readonly header: RunHeader;
  readonly #file: AppendFile;

  constructor(home: Home, header: RunHeader) {
    this.header = header;
    this.#file = new AppendFile(journalFileOf(home, header.id));
    this.#write({ run: header });
  }

  begin(step: BegunStep): void {
    this.#write({ begin: step });
  }

  record(result: StepResult): void {
    this.#write({ step: withoutFile(result) });
  }

  end(endedAt: string, interrupted: boolean): void {
    this.#write({ end: { endedAt, interrupted } });
  }

  close(): void {
    this.#file.close();
  }

  #write(line: z.input<typeof lineSchema>): void {
    this.#file.append(`${JSON.stringify(line)}\n`);
    this.#file.sync();
  }
}

/**
 * Reads a run's journal. A last line that was torn by a crash or a power cut is passed over, for its step was never said to be done;
 * undefined where not even the first line is whole.
 */
export function readRunJournal(text: string): WrittenRun | undefined {
  let written: WrittenRun | undefined;
  for (const text_ of text.split('\n')) {
    const line = lineSchema.safeParse(parseJson(text_));
    if (!line.success) continue;
    if ('run' in line.data) written ??= { header: line.data.run, results: [], begun: undefined, end: undefined };
    else if (!written) continue;
    else if ('begin' in line.data) written.begun = line.data.begin;
    else if ('end' in line.data) written.end = line.data.end;
    else {
      written.results.push(line.data.step);
      written.begun = undefined;
    }
  }
  return written;
}

/** What a run of this bench has in its journal. */
export function writtenRun(home: Home, runId: string): WrittenRun {
  const file = journalFileOf(home, runId);
  const written = readRunJournal(readIfThere(file) ?? '');
  if (!written) throw new BadInputError('the journal of the run is gone: something else removed it', { file });
  return written;
}

/**
 * The bench log of a run that was written down, with its captures. A run without an end was broken off: it is closed as interrupted,
 * and the lamps that were recorded when it broke off are kept as a capture that was cut.
 */
export function logOf(home: Home, { header, results, begun, end }: WrittenRun): RunLog {
  const steps = results.map((result): StepResult =>
    result.kind === 'capture' || result.kind === 'watch' ? { ...result, file: captureText(home, result.captureId) } : result,
  );
  const lastAt = begun?.at ?? results.at(-1)?.endedAt ?? header.startedAt;
  if (!end && begun?.captureId !== undefined && begun.kind === 'capture') {
    const { stepId, title, at, captureId } = begun;
    const file = wholeLines(readIfThere(captureFileOf(home, captureId)) ?? '');
    if (file.split('\n').length > 2)
      steps.push({ kind: 'capture', stepId, title, startedAt: at, endedAt: lastAt, captureId, file, fromFile: false });
  }
  const { id, script, rig, startedAt } = header;
  return { id, script, rig, startedAt, endedAt: end?.endedAt ?? lastAt, interrupted: end?.interrupted ?? true, people: [], steps };
}

const wholeLines = (text: string): string => text.slice(0, text.lastIndexOf('\n') + 1);
