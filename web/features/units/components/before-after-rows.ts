import type { ReadingBody, UnitEvent, UnitEventOf } from '../../../../shared/history/events.js';
import { sinceOpened } from '../../../../shared/readiness/facts.js';
import { standingResult } from '../../../../shared/readiness/standing.js';

export interface BeforeAfterRow {
  checkId: string;
  title: string;
  before: ReadingBody | undefined;
  after: ReadingBody | undefined;
}

type Readings = UnitEventOf<'reading'>[];
const readingsIn = (events: readonly UnitEvent[]): Readings => events.filter((event) => event.kind === 'reading');

function standingOf(readings: Readings, checkId: string): ReadingBody | undefined {
  const standing = standingResult(readings.filter((event) => event.reading.checkId === checkId));
  return standing?.kind === 'reading' ? standing.reading : undefined;
}

/**
 * The readings on both sides of the last repair, a row a check: `before` is what stood of the newest stretch before it in which the
 * check was measured, `after` what stands now. Takes the events that count, oldest first; without a repair there is only `after`.
 */
export function beforeAfterRows(counting: readonly UnitEvent[]): { repair: UnitEventOf<'repair'> | undefined; rows: BeforeAfterRow[] } {
  const stretches: UnitEvent[][] = [[]];
  let repair: UnitEventOf<'repair'> | undefined;
  for (const event of sinceOpened(counting)) {
    if (event.kind === 'repair') {
      repair = event;
      stretches.push([]);
    } else stretches.at(-1)?.push(event);
  }
  const after = readingsIn(stretches.at(-1) ?? []);
  const before = stretches.slice(0, -1).map(readingsIn).reverse();
  const titles = new Map([...before.flat(), ...after].map(({ reading }) => [reading.checkId, reading.title]));
  const rows = [...titles].map(([checkId, title]) => ({
    checkId,
    title,
    before: before.map((readings) => standingOf(readings, checkId)).find((reading) => reading !== undefined),
    after: standingOf(after, checkId),
  }));
  return { repair, rows };
}
