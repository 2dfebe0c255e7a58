import type { UnitRow } from '../../../shared/api/units.js';
import type { CaptureBody, UnitEvent } from '../../../shared/history/events.js';
import { countingEvents, sinceOpened } from '../../../shared/readiness/facts.js';
import { readiness, type Readiness } from '../../../shared/readiness/readiness.js';
import { stageOf, type Stage } from '../../../shared/readiness/stage.js';
import type { Sheet } from '../../../shared/sheet/schema.js';
import { codesNamed, facesOf } from '../../history/faces.js';
import type { StoredTag } from '../../history/tag-store.js';
import { eventsOf, factsOf, type UnitHistory } from '../../history/unit-history.js';

export const tagStateOf = (tag: StoredTag): NonNullable<UnitRow['tag']> => ({
  number: tag.number,
  standing: tag.withdrawn ? 'withdrawn' : 'stands',
  signedOffAt: tag.signedOffAt,
});

const codesOf = (capture: CaptureBody): string[] => [...new Set(capture.answer.codes.map(({ code }) => code))];

/** The last capture since intake or return, as the lamps column shows it. */
function lampsOf(events: readonly UnitEvent[], sheet: Sheet | undefined): UnitRow['lamps'] {
  const last = sinceOpened(events).findLast((event) => event.kind === 'capture');
  if (last?.kind !== 'capture') return { state: 'not captured', codes: [] };
  const codes = codesOf(last.capture);
  if (codes.length > 0) {
    const faces = facesOf(codes, sheet);
    return { state: 'codes', codes: codes.map((code) => ({ code, ...(faces[code] ? { face: faces[code] } : {}) })) };
  }
  const unreadable =
    last.capture.answer.segments.some((segment) => segment.kind === 'unreadable') ||
    !last.capture.answer.segments.some((segment) => segment.kind === 'ready');
  return { state: unreadable ? 'unreadable' : 'no code', codes: [] };
}

/** What the unit waits for, in a few words: the first thing that keeps it from its next stage. */
function waitsFor(history: UnitHistory, stage: Stage, { rules, readyToSign }: Readiness): string {
  if (history.unit.licensedOnly) return 'A licensed person.';
  if (history.unit.family === undefined) return 'A control family with a service sheet.';
  if (stage === 'signed off') return 'Its sale.';
  if (stage === 'sold') return 'Nothing.';
  if (readyToSign) return `Sign-off. ${rules.find(({ id, state }) => id === 'four-eyes' && state !== 'met')?.how ?? 'A lead signs.'}`;
  return rules.find((rule) => rule.state !== 'met')?.how ?? 'Sign-off. A lead signs.';
}

export function unitRowOf(history: UnitHistory): UnitRow {
  const events = eventsOf(history);
  const facts = factsOf(history, events);
  const judged = readiness(facts);
  const stage = stageOf(countingEvents(facts));
  return {
    ...history.unit,
    stage,
    rulesMet: judged.met,
    rulesTotal: judged.total,
    ...(history.tag ? { tag: tagStateOf(history.tag) } : {}),
    lamps: lampsOf(events, history.sheet),
    waitsFor: waitsFor(history, stage, judged),
    lastEventAt: history.placed.at(-1)?.recordedAt.toISOString() ?? history.unit.takenInAt,
  };
}

export const codesInHistory = (events: readonly UnitEvent[]): string[] =>
  events.flatMap((event) => (event.kind === 'capture' ? codesNamed(event.capture.answer) : []));
