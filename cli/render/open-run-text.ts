import { lastPersonIn, peopleIn } from '../journal/run-journal.js';
import type { OpenRun } from '../journal/open-runs.js';
import { dayText, plural, timeText } from './words.js';

/** Where an open run stands: `step 5 of 13, parked by Wil Tarrow, 5 Mar 2026 15:10`. */
export function openRunText(open: OpenRun): string {
  const { written, state, owner } = open;
  const at = owner?.since ?? written.stop?.at ?? written.lastAt;
  const when = `${dayText(at)} ${timeText(at)}`;
  const person = (owner ? lastPersonIn(written) : (written.stop?.by ?? lastPersonIn(written))).name;
  const damaged = written.damage ? `; line ${written.damage.line} of its journal is damaged` : '';
  return `${written.header.script.name}, ${placeText(open)}, ${stateText(open)} ${state === 'going' ? 'with' : 'by'} ${person}, ${when}${damaged}`;
}

/** `step 5 of 13`; `all 13 steps done`. */
export function placeText({ done, of }: OpenRun): string {
  if (of === undefined) return plural(done, 'step done', 'steps done');
  return done >= of ? `all ${of} steps done` : `step ${done + 1} of ${of}`;
}

export function stateText({ state, written }: OpenRun): string {
  if (state !== 'broken off') return state;
  return written.stop?.how === 'instrument failed'
    ? 'stopped for an instrument'
    : written.stop?.how === 'stopped'
      ? 'stopped'
      : 'broken off';
}

/** Who had a hand in it: `Wil Tarrow, Ines Marlow`. */
export const peopleText = ({ written }: OpenRun): string =>
  [...new Map(peopleIn(written).map(({ person }) => [person.id, person.name])).values()].join(', ');
