import { readFileSync } from 'node:fs';
import { BadInputError } from '../../shared/errors.js';
import type { CaptureHeader } from '../../shared/lamps/capture.js';
import { readCapture } from '../../shared/lamps/read-capture.js';
import { endLine, gapLine, headerLine, markLine, sampleLine } from '../../shared/lamps/write-capture.js';
import type { Home } from '../home.js';
import { AppendFile } from './append-file.js';

export const captureFileOf = (home: Home, captureId: string): string => home.path('captures', `${captureId}.lamps.ndjson`);

/** A recorded capture's text. */
export function captureText(home: Home, captureId: string): string {
  const file = captureFileOf(home, captureId);
  try {
    return readFileSync(file, 'utf8');
  } catch (error) {
    throw new BadInputError(`a capture of this bench can't be read: ${(error as Error).message}`, { file });
  }
}

/** The lines of a capture file up to the first that can't be read: a power cut may have left anything at its end. Empty where not even the header can. */
export function readablePart(text: string): string {
  let part = text.slice(0, text.lastIndexOf('\n') + 1);
  while (part !== '') {
    try {
      readCapture(part);
      return part;
    } catch (error) {
      if (!(error instanceof BadInputError)) throw error;
      const lines = part.split('\n').slice(0, -1);
      const keep = Math.min((error.line ?? 1) - 1, lines.length - 1);
      part = lines
        .slice(0, keep)
        .map((line) => `${line}\n`)
        .join('');
    }
  }
  return '';
}

/** A capture as it is being recorded: each line is in the file as soon as it comes, so that a crash costs none of it. */
export class CaptureFile {
  readonly id: string;
  readonly header: CaptureHeader;
  readonly #file: AppendFile;
  lastUs = 0;
  samples = 0;

  constructor(home: Home, id: string, header: CaptureHeader) {
    this.id = id;
    this.header = header;
    this.#file = new AppendFile(captureFileOf(home, id));
    this.#file.append(headerLine(header));
  }

  get path(): string {
    return this.#file.file;
  }

  sample(timeUs: number, levels: readonly number[]): void {
    this.#file.append(sampleLine(timeUs, levels));
    this.lastUs = timeUs;
    this.samples += 1;
  }

  mark(timeUs: number, label: string): void {
    this.#file.append(markLine(timeUs, label));
  }

  gap(lost: number, timeUs: number): void {
    this.#file.append(gapLine(lost, timeUs));
  }

  /** The capture ends here, whole. */
  end(timeUs: number): void {
    this.#file.append(endLine(Math.max(timeUs, this.lastUs)));
    this.keep();
  }

  /** The capture was cut short: no end line, but what came is on the disk. */
  keep(): void {
    this.#file.sync();
    this.#file.close();
  }
}
