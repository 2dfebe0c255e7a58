import type { TagContent } from '../api/tags.js';
import { formatLimits, formatReading, formatSpread } from '../measure/format-reading.js';
import { clock } from '../script/judge-watch.js';
import { checksFor, countingEvents, sinceOpened, sinceRepair, type UnitFacts } from './facts.js';
import { noCodeProof } from './no-code.js';
import { checkIdOf, isCheckEvent, standingResult, verdictOf } from './standing.js';

/**
 * What a readiness tag prints as tested: every check of the sheet that stands as passed since the last repair, the calibration run,
 * and that no code shows. Words and digits as the paper has them.
 */
export function testedOnTag(facts: UnitFacts): TagContent['tested'] {
  const counting = countingEvents(facts);
  const results = sinceRepair(counting).filter(isCheckEvent);
  const tested: TagContent['tested'] = [];
  for (const check of checksFor(facts)) {
    const standing = standingResult(results.filter((event) => checkIdOf(event) === check.id));
    if (!standing || verdictOf(standing) !== 'pass') continue;
    if (standing.kind === 'inspection') {
      tested.push({ title: check.title, reading: 'looked at', limit: 'nothing wrong', verdict: 'pass' });
    } else {
      const { judgement, resolution } = standing.reading;
      tested.push({
        title: check.title,
        reading: formatReading(judgement.value, resolution, judgement.unit),
        spread: formatSpread(judgement.expandedUncertainty, resolution),
        limit: formatLimits(judgement.low, judgement.high, judgement.unit, resolution),
        verdict: 'pass',
      });
    }
  }
  const calibration = sinceOpened(counting).findLast((event) => event.kind === 'calibration');
  if (calibration?.kind === 'calibration' && calibration.calibration.verdict === 'pass' && facts.sheet?.calibration) {
    const [least, most] = facts.sheet.calibration.durationS;
    tested.push({
      title: 'Calibration run',
      reading: clock(calibration.calibration.seconds),
      limit: `${clock(least)} to ${clock(most)}`,
      verdict: 'pass',
    });
  }
  const noCode = noCodeProof(facts);
  if (facts.sheet && noCode.verdict === 'pass') {
    const ready = facts.sheet.ready?.lamps ?? [];
    tested.push({
      title: 'Lamps: no code',
      reading: `${Math.floor(noCode.durationS)} s`,
      limit: 'ready blink',
      verdict: 'pass',
      lamps: facts.sheet.lamps.map((lamp) => ready.includes(lamp.id)),
    });
  }
  return tested;
}

/** What was mended since the unit was opened, as the tag prints it. */
export function mendedOnTag(facts: UnitFacts): TagContent['mended'] {
  return sinceOpened(countingEvents(facts)).flatMap((event) =>
    event.kind === 'repair' ? [{ part: event.repair.part, source: event.repair.partSource.kind, at: event.at, by: event.by.name }] : [],
  );
}

/** The heaviest that one person lifts alone (common practice, no published source: two people from 25 kg up). */
const ONE_PERSON_LIFTS_KG = 25;

/** The cautions that every tag carries; the machine's mass decides the lifting. */
export function cautionsOnTag(facts: UnitFacts, massKg: number | undefined): string[] {
  return [
    massKg === undefined || massKg > ONE_PERSON_LIFTS_KG
      ? `${massKg === undefined ? 'Heavy' : `${massKg} kg`}: two people to lift.`
      : `${massKg} kg.`,
    ...(facts.unit.protectionClass === 'I' ? ['Earthed socket only.'] : []),
    'Unplug before opening anything: hot water, moving parts.',
    ...(facts.sheet?.calibration ? ['After moving it: bolts out, level, calibration run.'] : []),
  ];
}
