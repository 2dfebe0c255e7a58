import type { Sheet } from '../sheet/schema.js';
import type { PhaseView, Segment } from './answer.js';
import type { Bins } from './bin-levels.js';
import type { LampLight } from './light-model.js';

/** What a coding gets to read: light already turned into lit and dark. */
export interface CodingInput {
  sheet: Sheet;
  bins: Bins;
  /** By lamp id; every lamp of the sheet that the capture has. */
  lights: ReadonlyMap<string, LampLight>;
  /** Times of the `next` marks, seconds. */
  nextMarksS: readonly number[];
  minConfidence: number;
}

/** What a coding gives back. */
export interface CodingReading {
  segments: Segment[];
  deadLamps: string[];
  phases: PhaseView[];
  warnings: string[];
}

/** One coding of the sheet format: which lamps it can't do without, and how it reads. */
export interface CodingReader {
  neededLamps(sheet: Sheet): string[];
  read(input: CodingInput): CodingReading;
}
