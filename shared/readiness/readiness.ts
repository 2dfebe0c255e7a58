import { z } from 'zod';
import type { PersonRef, UnitEvent } from '../history/events.js';
import type { Check } from '../sheet/schema.js';
import { checksFor, countingEvents, isMend, sinceOpened, sinceRepair, type UnitFacts } from './facts.js';
import { noCodeProof } from './no-code.js';
import { checkIdOf, isCheckEvent, standingResult, verdictOf } from './standing.js';

/** One readiness rule, judged: what it rests on, and, where it is not met, how to get it. */
export const ruleResultSchema = z.strictObject({
  id: z.enum(['checks', 'no-code', 'calibration', 'electrical-safety', 'four-eyes']),
  title: z.string(),
  state: z.enum(['met', 'missing', 'fail', 'inconclusive']),
  evidence: z.string(),
  how: z.string().optional(),
});
export type RuleResult = z.infer<typeof ruleResultSchema>;

export const readinessSchema = z.strictObject({
  rules: z.array(ruleResultSchema),
  met: z.number().int(),
  total: z.number().int(),
  /** Every rule but four eyes is met: a lead can sign. */
  readyToSign: z.boolean(),
});
export type Readiness = z.infer<typeof readinessSchema>;

type Judged = Pick<RuleResult, 'state' | 'evidence' | 'how'>;

/** The checks of a rule together: the worst standing result since the last repair. */
function judgeChecks(facts: UnitFacts, checks: readonly Check[]): Judged {
  if (checks.length === 0)
    return {
      state: 'missing',
      evidence: 'the service sheet names no checks',
      how: facts.sheet ? 'A lead adds them to the sheet.' : 'Give the unit a control family with a service sheet.',
    };
  const results = sinceRepair(countingEvents(facts)).filter(isCheckEvent);
  const open: { check: Check; verdict: string }[] = [];
  for (const check of checks) {
    const standing = standingResult(results.filter((event) => checkIdOf(event) === check.id));
    const verdict = standing ? verdictOf(standing) : 'not done';
    if (verdict !== 'pass') open.push({ check, verdict });
  }
  if (open.length === 0) return { state: 'met', evidence: `${checks.length} of ${checks.length} passed` };
  const named = (verdict: string): string[] => open.filter((one) => one.verdict === verdict).map((one) => one.check.title);
  const failed = named('fail');
  if (failed.length > 0)
    return { state: 'fail', evidence: `${failed.join(', ')}: fail`, how: 'Mend it, record the repair, measure again.' };
  const unsure = named('inconclusive');
  if (unsure.length > 0)
    return {
      state: 'inconclusive',
      evidence: `${unsure.join(', ')}: inconclusive`,
      how: 'Too close for this meter: measure with one of smaller uncertainty.',
    };
  const missing = open.map((one) => one.check.title);
  const mended = sinceOpened(facts.events).some(isMend);
  return {
    state: 'missing',
    evidence: `${checks.length - open.length} of ${checks.length}`,
    how: `${mended ? 'Not done since the last repair' : 'Not done yet'}: ${missing.join(', ')}.`,
  };
}

function judgeNoCodeRule(facts: UnitFacts): Judged {
  const { verdict, reason } = noCodeProof(facts);
  const how = `Capture the lamps in service mode for ${facts.sheet?.noCodeS ?? 20} s: only the ready blink may show.`;
  if (verdict === 'pass') return { state: 'met', evidence: reason };
  if (verdict === 'fail')
    return { state: 'fail', evidence: reason, how: 'Mend the fault, record the repair, clear the stored codes, capture again.' };
  return {
    state: verdict === 'inconclusive' ? 'inconclusive' : 'missing',
    evidence: reason,
    how: reason.includes('cleared') ? `Clear them by the sheet's procedure. ${how}` : how,
  };
}

/**
 * Calibration is due after intake (the machine was moved), after a return, and whenever a part was changed
 * (common practice, no published source). A calibration run is an act, not a measurement: the last one counts, all are shown.
 */
function judgeCalibration(facts: UnitFacts): Judged {
  const events = sinceOpened(countingEvents(facts));
  const lastSwap = events.findLastIndex(
    (event) => event.kind === 'part removed' || (event.kind === 'repair' && event.repair.partSource.kind !== 'none'),
  );
  const run = events.slice(lastSwap + 1).findLast((event) => event.kind === 'calibration');
  const how = 'Run the calibration procedure and let the lamps be watched (a step of the proof script).';
  if (run?.kind !== 'calibration')
    return { state: 'missing', evidence: lastSwap >= 0 ? 'none since the part swap' : 'none since the machine was moved here', how };
  const { verdict, reason } = run.calibration;
  if (verdict === 'pass') return { state: 'met', evidence: reason };
  return { state: verdict === 'fail' ? 'fail' : verdict === 'inconclusive' ? 'inconclusive' : 'missing', evidence: reason, how };
}

/** Who recorded a run, a reading, an inspection or a repair since intake or return: their hands were on it (gate 7). */
export function handsOn(events: readonly UnitEvent[]): PersonRef[] {
  const people = new Map<string, PersonRef>();
  for (const event of sinceOpened(events)) {
    if (
      event.kind === 'run began' ||
      event.kind === 'run ended' ||
      isMend(event) ||
      event.kind === 'calibration' ||
      event.kind === 'capture' ||
      event.kind === 'codes cleared' ||
      isCheckEvent(event)
    ) {
      people.set(event.by.id, event.by);
      if (event.kind === 'run ended') for (const person of event.people ?? []) people.set(person.id, person);
    }
  }
  return [...people.values()];
}

function judgeFourEyes(facts: UnitFacts, signer: PersonRef | undefined): Judged {
  if (!facts.shop.fourEyes) return { state: 'met', evidence: 'switched off in this shop; the tag says so' };
  const people = handsOn(facts.events);
  const names = people.map((person) => person.name).join(', ');
  const signedBy = signer ?? signedOffBy(facts.events);
  if (!signedBy)
    return {
      state: 'missing',
      evidence: 'no sign-off',
      how: names ? `A lead other than ${names}, who worked on it.` : 'A lead who did not work on it.',
    };
  if (signedBy.role !== 'lead') return { state: 'fail', evidence: `${signedBy.name} is no lead`, how: 'A lead signs.' };
  if (people.some((person) => person.id === signedBy.id))
    return { state: 'fail', evidence: `${signedBy.name} worked on it`, how: `A lead other than ${names} signs.` };
  return { state: 'met', evidence: signer ? `${signedBy.name}, who did not work on it` : `signed by ${signedBy.name}` };
}

function signedOffBy(events: readonly UnitEvent[]): PersonRef | undefined {
  const last = events.findLast((event) => event.kind === 'sign-off' || event.kind === 'tag withdrawn' || event.kind === 'returned');
  return last?.kind === 'sign-off' ? last.by : undefined;
}

/**
 * The readiness rules of a unit, judged from the facts.
 *
 * Inconclusive is not met, a rule without evidence is missing. `signer` is the lead who is about to sign: four eyes is then
 * judged for that person; without one it stays missing until a sign-off is on the books.
 * The rules are this shop's and certify no compliance.
 *
 * @example readiness(factsOfANewUnit).met // 0
 */
export function readiness(facts: UnitFacts, signer?: PersonRef): Readiness {
  const checks = checksFor(facts);
  const rules: RuleResult[] = [
    {
      id: 'checks',
      title: 'Checks passed',
      ...judgeChecks(
        facts,
        checks.filter((check) => check.required && !check.safety),
      ),
    },
    { id: 'no-code', title: 'No code, proved', ...judgeNoCodeRule(facts) },
    ...(facts.sheet?.calibration
      ? [{ id: 'calibration' as const, title: 'Calibration run after the last part swap', ...judgeCalibration(facts) }]
      : []),
    {
      id: 'electrical-safety',
      title: 'Electrical safety test',
      ...judgeChecks(
        facts,
        checks.filter((check) => check.safety),
      ),
    },
    { id: 'four-eyes', title: 'Four eyes', ...judgeFourEyes(facts, signer) },
  ];
  const met = rules.filter((rule) => rule.state === 'met').length;
  return { rules, met, total: rules.length, readyToSign: rules.every((rule) => rule.state === 'met' || rule.id === 'four-eyes') };
}
