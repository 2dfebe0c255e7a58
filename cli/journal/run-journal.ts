import { z } from 'zod';
import { BadInputError } from '../../shared/errors.js';
import { personRefSchema, type PersonRef } from '../../shared/history/events.js';
import { readCapture } from '../../shared/lamps/read-capture.js';
import {
  clockJumpSchema,
  holdsFile,
  runLogSchema,
  runPersonSchema,
  stepResultSchema,
  type ClockJump,
  type RunDamage,
  type RunLog,
  type RunPerson,
  type StepResult,
} from '../../shared/script/run-log.js';
import { readIfThere, type Home } from '../home.js';
import { AppendFile } from './append-file.js';
import { captureFileOf, captureText, readablePart } from './capture-file.js';
import { checkedLine, readCheckedLines } from './checked-lines.js';

const headerSchema = z.strictObject({
  id: z.uuid(),
  server: z.string(),
  unit: z.number().int(),
  by: personRefSchema,
  script: runLogSchema.shape.script,
  rig: runLogSchema.shape.rig,
  /** What `--rig` said; the bench's own rig file, where absent. */
  rigChoice: z.string().optional(),
  sheetEdition: z.number().int().positive().optional(),
  startedAt: z.iso.datetime(),
  /** The process that began it; who runs it now stands in the lock. */
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

/** Why nobody goes on with it: parked, Ctrl-C, an instrument that failed, a fault or a full disk. A run that was killed says nothing. */
const stopSchema = z.strictObject({
  at: z.iso.datetime(),
  how: z.enum(['parked', 'stopped', 'instrument failed', 'fault']),
  by: personRefSchema,
});
export type RunStop = z.infer<typeof stopSchema>;
const endSchema = z.strictObject({ endedAt: z.iso.datetime(), interrupted: z.boolean() });

const lineSchema = z.union([
  z.strictObject({ run: headerSchema }),
  z.strictObject({ begin: begunSchema }),
  z.strictObject({ step: stepResultSchema }),
  z.strictObject({ person: runPersonSchema.omit({ steps: true }) }),
  z.strictObject({ stop: stopSchema }),
  z.strictObject({ jump: clockJumpSchema.omit({ steps: true }) }),
  /** Somebody has seen that this line is torn or damaged; what stands behind this one counts again. */
  z.strictObject({ passedOver: z.strictObject({ line: z.number().int(), why: z.string() }) }),
  z.strictObject({ end: endSchema }),
]);
type Line = z.input<typeof lineSchema>;

export const journalFileOf = (home: Home, runId: string): string => home.path('journal', `${runId}.ndjson`);

/** A line in the middle that does not hold together: nothing behind it is taken for done. */
export interface Damage {
  line: number;
  reason: string;
  /** Lines behind it that are whole in themselves. */
  behind: number;
  /** How many results stood before it. */
  steps: number;
  /** The results among those lines. */
  found: StepResult[];
  /** Recordings that were begun there and have no result. */
  begun: BegunStep[];
}

/** What a run on this bench has written down so far. */
export interface WrittenRun {
  header: RunHeader;
  results: StepResult[];
  /** The step that had begun and has no result yet. */
  begun: BegunStep | undefined;
  /** Who came to it after it began, and who left. */
  people: RunPerson[];
  jumps: ClockJump[];
  /** How it was left, where nobody has gone on with it since. */
  stop: RunStop | undefined;
  end: z.infer<typeof endSchema> | undefined;
  damage: Damage | undefined;
  /** Damage that somebody has seen and gone on behind. */
  passed: Damage[];
  /** The last line was cut off while it was written: its step was never said to be done. */
  torn: boolean;
  /** Lines in the file, and whether the last one has its end. */
  lines: number;
  endsWhole: boolean;
  /** The latest time in it. */
  lastAt: string;
}

/** The text of a capture is kept beside the journal, not in it. */
const withoutFile = (result: StepResult): StepResult => (holdsFile(result) ? { ...result, file: '' } : result);

/** The journal of a run that is going. Each step's result is on the disk before the next begins. */
export class RunJournal {
  readonly header: RunHeader;
  readonly #file: AppendFile;
  #lines: number;

  private constructor(header: RunHeader, file: AppendFile, lines: number) {
    this.header = header;
    this.#file = file;
    this.#lines = lines;
  }

  static create(home: Home, header: RunHeader): RunJournal {
    const journal = new RunJournal(header, new AppendFile(journalFileOf(home, header.id)), 0);
    journal.#write({ run: header });
    return journal;
  }

  /** Goes on with a journal that was left. What is torn or damaged in it stays where it is, and is noted as passed over. */
  static goOn(home: Home, written: WrittenRun): RunJournal {
    const file = new AppendFile(journalFileOf(home, written.header.id), { goesOn: true });
    const journal = new RunJournal(written.header, file, written.lines);
    if (!written.endsWhole) file.append('\n');
    if (written.damage) journal.#write({ passedOver: { line: written.damage.line, why: written.damage.reason } });
    else if (written.torn) journal.#write({ passedOver: { line: written.lines, why: 'it was cut off while it was written' } });
    return journal;
  }

  begin(step: BegunStep): void {
    this.#write({ begin: step });
  }

  record(result: StepResult): void {
    this.#write({ step: withoutFile(result) });
  }

  person(person: Omit<RunPerson, 'steps'>): void {
    this.#write({ person });
  }

  stop(stop: RunStop): void {
    this.#write({ stop });
  }

  jump(jump: Omit<ClockJump, 'steps'>): void {
    this.#write({ jump });
  }

  end(endedAt: string, interrupted: boolean): void {
    this.#write({ end: { endedAt, interrupted } });
  }

  close(): void {
    this.#file.close();
  }

  #write(line: Line): void {
    this.#file.append(checkedLine(this.#lines + 1, line));
    this.#file.sync();
    this.#lines += 1;
  }
}

/**
 * Reads a run's journal. A last line that was torn by a crash or a power cut is passed over, for its step was never said to be done.
 * Behind a line that is damaged nothing is taken for done, until somebody went on with the run and has noted the damage.
 * Undefined where not even the first line is whole.
 */
export function readRunJournal(text: string): WrittenRun | undefined {
  const lines = readCheckedLines(text);
  const [first, ...rest] = lines;
  const header = first && 'value' in first ? z.strictObject({ run: headerSchema }).safeParse(first.value) : undefined;
  if (!header?.success) return undefined;
  const { run } = header.data;
  const written: WrittenRun = {
    header: run,
    results: [],
    begun: undefined,
    people: [],
    jumps: [],
    stop: undefined,
    end: undefined,
    damage: undefined,
    passed: [],
    torn: false,
    lines: lines.length,
    endsWhole: text.endsWith('\n'),
    lastAt: run.startedAt,
  };
  for (const line of rest) {
    const parsed = lineSchema.safeParse('wrong' in line ? line.whole : line.value);
    if (!written.damage) {
      if (parsed.success && !('wrong' in line)) {
        take(written, parsed.data);
        continue;
      }
      if ('wrong' in line && line.torn) {
        written.torn = true;
        continue;
      }
      const reason = 'wrong' in line ? line.wrong : 'this version of Refettle does not know it';
      written.damage = { line: line.number, reason, behind: 0, steps: written.results.length, found: [], begun: [] };
      // A line that is sound in itself and in the wrong place stands behind its damage.
      if (!('wrong' in line) || line.whole === undefined) continue;
    }
    if (parsed.success) takeBehind(written, written.damage, parsed.data);
  }
  return written;
}

/** Nothing behind damage is taken for done; who came, and what was seen there, is not forgotten. */
function takeBehind(written: WrittenRun, damage: Damage, line: z.output<typeof lineSchema>): void {
  if ('passedOver' in line && line.passedOver.line === damage.line) {
    written.passed.push(damage);
    written.damage = undefined;
    return;
  }
  damage.behind += 1;
  if ('begin' in line) {
    if (line.begin.captureId !== undefined) damage.begun.push(line.begin);
    written.lastAt = later(written.lastAt, line.begin.at);
  } else if ('step' in line) {
    const { step } = line;
    const text = JSON.stringify(step);
    if (![...written.results, ...damage.found].some((one) => JSON.stringify(one) === text)) damage.found.push(step);
    if (holdsFile(step)) damage.begun = damage.begun.filter(({ captureId }) => captureId !== step.captureId);
    written.lastAt = later(written.lastAt, step.endedAt);
  } else if ('person' in line || 'jump' in line || 'stop' in line) {
    take(written, line);
  }
}

function take(written: WrittenRun, line: z.output<typeof lineSchema>): void {
  const steps = written.results.length;
  const at = (time: string): void => void (written.lastAt = later(written.lastAt, time));
  if ('begin' in line) {
    written.begun = line.begin;
    at(line.begin.at);
  } else if ('step' in line) {
    written.results.push(line.step);
    written.begun = undefined;
    at(line.step.endedAt);
  } else if ('person' in line) {
    written.people.push({ ...line.person, steps });
    written.stop = undefined;
    at(line.person.at);
  } else if ('stop' in line) {
    written.stop = line.stop;
    at(line.stop.at);
  } else if ('jump' in line) {
    written.jumps.push({ ...line.jump, steps });
  } else if ('end' in line) {
    written.end = line.end;
    at(line.end.endedAt);
  }
}

const later = (one: string, other: string): string => (Date.parse(other) > Date.parse(one) ? other : one);

/** What a run of this bench has in its journal. Refuses (BadInputError) one that is gone, or whose first line is damaged. */
export function writtenRun(home: Home, runId: string): WrittenRun {
  const file = journalFileOf(home, runId);
  const text = readIfThere(file);
  if (text === undefined) throw new BadInputError('the journal of the run is gone: something else removed it', { file });
  const written = readRunJournal(text);
  if (!written)
    throw new BadInputError('the first line of the journal is damaged: which run it was can’t be said. It is left as it is', {
      file,
      line: 1,
    });
  return written;
}

/** Everybody who had a hand in a run, whoever began it first. */
export const peopleIn = ({ header, people }: WrittenRun): RunPerson[] => [
  { person: header.by, at: header.startedAt, how: 'began', steps: 0 },
  ...people,
];

/** Whose run it is now: who came to it last. */
export const lastPersonIn = (written: WrittenRun): PersonRef => peopleIn(written).at(-1)?.person ?? written.header.by;

/** The results with their capture files. */
export const resultsOf = (home: Home, { results }: WrittenRun): StepResult[] =>
  results.map((result): StepResult => {
    if (!holdsFile(result)) return result;
    const file = captureText(home, result.captureId);
    return { ...result, file: result.kind === 'cut' ? readablePart(file) : file };
  });

/** What became of the damage in a journal, with the capture files of what stands behind it; a file that is gone takes its result along. */
export const damagesOf = (home: Home, { passed, damage }: WrittenRun): RunDamage[] =>
  [...passed, ...(damage ? [damage] : [])].map(({ line, reason, steps, found, begun }) => ({
    line,
    reason,
    steps,
    found: [...found, ...begun.flatMap((one) => cutOf(home, { begun: one }) ?? [])].flatMap((result): StepResult[] => {
      if (!holdsFile(result)) return [result];
      const file = readablePart(readIfThere(captureFileOf(home, result.captureId)) ?? '');
      return file === '' ? [] : [{ ...result, file }];
    }),
  }));

/** The bench log of a run that was written down, with its captures. */
export function logOf(home: Home, written: WrittenRun): RunLog {
  const { header, jumps, end, lastAt } = written;
  const { id, script, rig, startedAt, sheetEdition } = header;
  const damages = damagesOf(home, written);
  return {
    id,
    script,
    rig,
    startedAt,
    endedAt: end?.endedAt ?? lastAt,
    interrupted: end?.interrupted ?? true,
    people: peopleIn(written),
    ...(sheetEdition === undefined ? {} : { sheetEdition }),
    ...(jumps.length === 0 ? {} : { clockJumps: jumps }),
    ...(damages.length === 0 ? {} : { damages }),
    steps: resultsOf(home, written),
  };
}

/** The lamps that were recorded when the run broke off, as a capture that was cut; undefined where none came. */
export function cutOf(home: Home, { begun }: Pick<WrittenRun, 'begun'>): StepResult | undefined {
  if (begun?.captureId === undefined) return undefined;
  const { stepId, title, at, captureId } = begun;
  const file = readablePart(readIfThere(captureFileOf(home, captureId)) ?? '');
  const last = file === '' ? undefined : readCapture(file).timesUs.at(-1);
  if (last === undefined) return undefined;
  const endedAt = new Date(Date.parse(at) + Math.round(last / 1000)).toISOString();
  return { kind: 'cut', stepId, title, startedAt: at, endedAt, captureId, file };
}
