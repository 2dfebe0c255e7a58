import { countingEvents, type UnitFacts } from './facts.js';
import { isCheckEvent, verdictOf } from './standing.js';

/**
 * What withdraws a standing tag (gate 8): the first thing after its sign-off that breaks what the tag says, in words for the tag's page.
 *
 * Takes the unit's facts and the tag's number; only events that count can break a tag. A repair, a return, a check that did not pass, a calibration run
 * that did not end well, or a code on the lamps. Undefined while nothing does, and for a tag that was never signed.
 */
export function whatWithdraws(facts: UnitFacts, tag: string): string | undefined {
  const events = countingEvents(facts);
  const signed = events.findIndex((event) => event.kind === 'sign-off' && event.tag === tag);
  if (signed < 0) return undefined;
  for (const event of events.slice(signed + 1)) {
    if (event.kind === 'repair') return `the machine was mended again after the sign-off: ${event.repair.part}`;
    if (event.kind === 'part removed') return `a part was taken out: ${event.part}`;
    if (event.kind === 'returned') return 'the machine came back';
    if (isCheckEvent(event) && verdictOf(event) !== 'pass') {
      return `a later check did not pass: ${event.kind === 'reading' ? event.reading.title : event.inspection.title}, ${verdictOf(event)}`;
    }
    if (event.kind === 'calibration' && event.calibration.verdict !== 'pass')
      return `a later calibration run did not pass: ${event.calibration.reason}`;
    if (event.kind === 'capture' && event.capture.answer.codes.length > 0)
      return `the lamps showed ${event.capture.answer.codes.map((code) => code.code).join(', ')} afterwards`;
  }
  return undefined;
}
