import { NotYetError } from '../errors.js';
import type { Coding } from '../sheet/schema.js';
import type { CodingReader } from './coding-reader.js';
import { weightedPhasesReader } from './weighted-phases.js';

/** Every coding of the sheet format and who reads it: a new one is a file and a line here. */
const READERS: Record<Coding['kind'], CodingReader | undefined> = {
  'weighted-phases': weightedPhasesReader,
  'flash-count': undefined,
  'steady-pattern': undefined,
};

/** The reader of a sheet's coding; a NotYetError where there is none yet. */
export function codingReader(kind: Coding['kind']): CodingReader {
  const reader = READERS[kind];
  if (reader === undefined) {
    const known = Object.entries(READERS)
      .filter(([, value]) => value !== undefined)
      .map(([name]) => name);
    throw new NotYetError(
      `Refettle cannot decode ${kind} sheets yet; it reads ${known.join(', ')}. Keep the captures: they will decode later`,
    );
  }
  return reader;
}
