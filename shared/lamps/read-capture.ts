import { BadInputError } from '../errors.js';
import { captureHeaderSchema, type Capture, type CaptureHeader } from './capture.js';

const BYTE_ORDER_MARK = '\uFEFF';

/**
 * Reads a lamp capture file (`NAME.lamps.ndjson`, contract section 1) from its text.
 *
 * Takes the whole text; gives times in whole microseconds and levels by column. LF ends a line; CR LF and a byte order mark are accepted.
 * A last line without LF counts if it is whole JSON; half a line is left out and the capture is `cut`, as it is without an `end` line.
 * Marks, gaps and `end` may carry late times; unknown object lines are passed over.
 *
 * Refuses with a BadInputError that names file, line (1-based) and reason: an empty file, a first line that is no header of this format and
 * version, a blank line, a line that is no JSON, a sample with the wrong number of levels, a time that is no whole microsecond, negative or
 * falling, a level that is no number or outside 0 to `scale.max`, anything after `end`.
 *
 * @example readCapture('{"format":"refettle.lamps","version":1,…}\n[0,12,900]\n{"end":10000}\n').timesUs // [0]
 */
export function readCapture(text: string, fileName?: string): Capture {
  const fail = (line: number, reason: string): never => {
    throw new BadInputError(reason, { ...(fileName === undefined ? {} : { file: fileName }), line });
  };
  const body = text.startsWith(BYTE_ORDER_MARK) ? text.slice(1) : text;
  if (body === '') fail(1, 'the file is empty: a capture begins with a header line');
  const lines = body.split('\n');
  const lastLineIsOpen = lines.at(-1) !== '';
  if (!lastLineIsOpen) lines.pop();

  let capture: Capture | undefined;
  let ended = false;
  for (let index = 0; index < lines.length; index += 1) {
    const lineNumber = index + 1;
    const raw = lines[index] ?? '';
    const line = raw.endsWith('\r') ? raw.slice(0, -1) : raw;
    const open = lastLineIsOpen && index === lines.length - 1;
    if (ended) fail(lineNumber, 'something stands after the end line');
    if (line.trim() === '' && !open) fail(lineNumber, 'a blank line: every line of a capture holds one JSON value');
    let value: unknown;
    try {
      value = JSON.parse(line);
    } catch {
      if (!open || capture === undefined) fail(lineNumber, 'this line is no JSON');
      break;
    }
    if (capture === undefined) {
      capture = startCapture(readHeader(value, (reason) => fail(lineNumber, reason)));
      continue;
    }
    if (Array.isArray(value)) addSample(capture, value, (reason) => fail(lineNumber, reason));
    else if (typeof value === 'object' && value !== null) {
      ended = addObjectLine(capture, value as Record<string, unknown>, (reason) => fail(lineNumber, reason));
    } else fail(lineNumber, 'this line is neither a sample (a list) nor an object');
  }
  if (capture === undefined) return fail(1, 'the file is empty: a capture begins with a header line');
  capture.cut = capture.endUs === undefined;
  return capture;
}

function startCapture(header: CaptureHeader): Capture {
  return { header, timesUs: [], levels: header.lamps.map(() => []), marks: [], gaps: [], cut: false };
}

function readHeader(value: unknown, fail: (reason: string) => never): CaptureHeader {
  if (typeof value !== 'object' || value === null || Array.isArray(value)) {
    return fail('the first line is no capture header: {"format":"refettle.lamps","version":1,…} was expected');
  }
  const parsed = captureHeaderSchema.safeParse(value);
  if (parsed.success) return parsed.data;
  const { format, version } = value as { format?: unknown; version?: unknown };
  if (format !== 'refettle.lamps') return fail('the first line is no capture header: its format is not "refettle.lamps"');
  if (version !== 1) return fail(`version ${JSON.stringify(version)} of the capture format is unknown here; this program reads version 1`);
  const issue = parsed.error.issues[0];
  const where = issue === undefined || issue.path.length === 0 ? '' : ` at ${issue.path.join('.')}`;
  return fail(`the capture header is wrong${where}: ${issue?.message ?? 'unreadable'}`);
}

function addSample(capture: Capture, sample: unknown[], fail: (reason: string) => never): void {
  const lamps = capture.header.lamps;
  if (sample.length !== lamps.length + 1) {
    fail(`the sample has ${Math.max(0, sample.length - 1)} levels, the header names ${lamps.length} lamps`);
  }
  const time = readTime(sample[0], 'the time of the sample', fail);
  const before = capture.timesUs.at(-1);
  if (before !== undefined && time < before) fail(`the time falls from ${before} to ${time} microseconds`);
  const max = capture.header.scale.max;
  for (let column = 0; column < lamps.length; column += 1) {
    const level = sample[column + 1];
    if (typeof level !== 'number' || !Number.isFinite(level)) fail(`the level of lamp '${lamps[column]}' is no number`);
    else if (level < 0 || level > max) fail(`the level of lamp '${lamps[column]}' is ${level}, outside 0 to ${max}`);
  }
  capture.timesUs.push(time);
  for (let column = 0; column < lamps.length; column += 1) capture.levels[column]?.push(sample[column + 1] as number);
}

/** Takes a mark, gap or end line; any other object is passed over. Tells whether the capture has ended. */
function addObjectLine(capture: Capture, line: Record<string, unknown>, fail: (reason: string) => never): boolean {
  if ('end' in line) {
    capture.endUs = readTime(line.end, 'the time of the end line', fail);
    return true;
  }
  if ('mark' in line) {
    const label = line.label;
    if (typeof label !== 'string') fail('the label of the mark is no text');
    else capture.marks.push({ atUs: readTime(line.mark, 'the time of the mark', fail), label });
  } else if ('lost' in line) {
    const lost = line.lost;
    if (typeof lost !== 'number' || !Number.isSafeInteger(lost) || lost < 0) fail('the number of lost lines is no whole number from 0');
    else capture.gaps.push({ atUs: readTime(line.at, 'the time of the gap', fail), lost });
  }
  return false;
}

function readTime(value: unknown, what: string, fail: (reason: string) => never): number {
  if (typeof value !== 'number' || !Number.isSafeInteger(value)) return fail(`${what} is no whole number of microseconds`);
  if (value < 0) return fail(`${what} is negative`);
  return value;
}
