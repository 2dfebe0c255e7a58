import { BadInputError } from '../../shared/errors.js';
import { holdsFile, type StepResult } from '../../shared/script/run-log.js';
import type { Home } from '../home.js';
import { captureFileOf, captureText } from './capture-file.js';
import type { WrittenRun } from './run-journal.js';

export interface LostCapture {
  title: string;
  file: string;
}

/**
 * A run without the captures whose files this bench no longer has: without them it could never be sent. A step that is left without its
 * capture, and one that looks at it, is not done, and says what the bench had seen; lamps of before a break are left out.
 */
export function withoutLostCaptures(home: Home, written: WrittenRun): { written: WrittenRun; lost: LostCapture[] } {
  const lost = new Map<string, LostCapture>();
  for (const result of written.results)
    if (holdsFile(result) && !isThere(home, result.captureId))
      lost.set(result.captureId, { title: result.title, file: captureFileOf(home, result.captureId) });
  if (lost.size === 0) return { written, lost: [] };
  const isLeftOut = (result: StepResult): boolean => result.kind === 'cut' && lost.has(result.captureId);
  // Who came when is counted in steps of the log.
  const stays = (steps: number): number => steps - written.results.slice(0, steps).filter(isLeftOut).length;
  return {
    written: {
      ...written,
      results: written.results.filter((result) => !isLeftOut(result)).map((result) => notDoneWithout(lost, result)),
      people: written.people.map((one) => ({ ...one, steps: stays(one.steps) })),
      jumps: written.jumps.map((one) => ({ ...one, steps: stays(one.steps) })),
      passed: written.passed.map((one) => ({ ...one, steps: stays(one.steps) })),
    },
    lost: [...lost.values()],
  };
}

function isThere(home: Home, captureId: string): boolean {
  try {
    captureText(home, captureId);
    return true;
  } catch (error) {
    if (!(error instanceof BadInputError)) throw error;
    return false;
  }
}

function notDoneWithout(lost: ReadonlyMap<string, LostCapture>, result: StepResult): StepResult {
  if (!('captureId' in result) || !lost.has(result.captureId)) return result;
  const { stepId, title, startedAt, endedAt, by, kind } = result;
  const seen =
    result.kind === 'expect' ? `; it had shown: ${result.seen}` : result.kind === 'watch' ? `; it had shown: ${result.watched.reason}` : '';
  return {
    kind: 'skipped',
    stepId,
    title,
    startedAt,
    endedAt,
    ...(by === undefined ? {} : { by }),
    stepKind: kind,
    judged: true,
    reason: `the file of its capture was gone from the bench when the run was closed${seen}`,
  };
}
