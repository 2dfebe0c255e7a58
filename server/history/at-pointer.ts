import { BadInputError } from '../../shared/errors.js';
import { InvalidError } from '../errors.js';

/** What shared code refuses as bad input, said of the member of the request that it came from. */
export function atPointer<T>(pointer: string, work: () => T): T {
  try {
    return work();
  } catch (error) {
    if (!(error instanceof BadInputError)) throw error;
    throw new InvalidError([
      { pointer, reason: error.line === undefined ? error.message : `line ${String(error.line)}: ${error.message}` },
    ]);
  }
}
