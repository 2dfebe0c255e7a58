import { z } from 'zod';
import type { UnitEvent } from '../history/events.js';
import { deadTestSchema, type DeadTest } from '../sheet/schema.js';
import { countingEvents, isMend, sinceOpened, sinceRepair, type UnitFacts } from './facts.js';
import { isCheckEvent, standingResult, verdictOf, type CheckEvent } from './standing.js';

/** A safety gate: open, or shut with each reason and the way through. */
export const gateStateSchema = z.strictObject({
  open: z.boolean(),
  reasons: z.array(z.string()),
  remedy: z.string().optional(),
  /** A lead opened it in spite of what is missing. */
  override: z.strictObject({ by: z.string(), reason: z.string() }).optional(),
});
export type GateState = z.infer<typeof gateStateSchema>;

const OPEN: GateState = { open: true, reasons: [] };
const DEAD_TEST_TITLE: Record<DeadTest, string> = {
  visual: 'visual check',
  'protective-conductor': 'protective conductor',
  insulation: 'insulation',
};

const deadTestOf = (event: CheckEvent): DeadTest | undefined =>
  event.kind === 'reading' ? event.reading.deadTest : event.inspection.deadTest;

/** Only class I has a protective conductor (common practice after IEC 61140's protection classes; the clause was not read). */
const deadTestsFor = (protectionClass: UnitFacts['unit']['protectionClass']): DeadTest[] =>
  deadTestSchema.options.filter((test) => test !== 'protective-conductor' || protectionClass === 'I');

/**
 * Whether an event can only make a gate shut, never open it: the machine was mended or came back, or one of its checks did not pass.
 * Such an event counts for the gates even where nothing else of its source does (refused by the server, set aside).
 *
 * @example mayShut(repair) // true
 */
export const mayShut = (event: UnitEvent): boolean =>
  isMend(event) || event.kind === 'returned' || (isCheckEvent(event) && verdictOf(event) !== 'pass');

/**
 * Whether the last test that put voltage on the machine has no discharge written down after it: whoever comes to it is told so.
 *
 * @example mayHoldCharge([intake, insulationOfAParkedRun]) // true
 */
export function mayHoldCharge(events: readonly UnitEvent[]): boolean {
  const tests = sinceOpened(events).flatMap((event) => (event.kind === 'reading' ? [event.reading] : []));
  return tests.findLast(({ deadTest, undischarged }) => deadTest === 'insulation' || undischarged === true)?.undischarged === true;
}

export interface EnergisingQuestion {
  /** A real rig puts power on a real machine: then only results off a real machine open the gate, in the demo shop too. */
  rigSimulated: boolean;
  /** Asks for one of the dead tests itself: only those before it must have passed. */
  before?: DeadTest;
}

/**
 * Gate 1, dead tests before power: may a step that energises this machine begin?
 *
 * Since intake or return, and again since the last repair, the visual check, the protective conductor and the insulation
 * must have passed in this order. A fail stops everything after it. A lead's override with a reason, given since then,
 * opens the gate. A machine for a licensed person only is never energised (gate 11), override or not.
 *
 * @example energisingGate(facts, { rigSimulated: false }).reasons // ['insulation is not done']
 */
export function energisingGate(facts: UnitFacts, question: EnergisingQuestion): GateState {
  if (facts.unit.licensedOnly) {
    return {
      open: false,
      reasons: ['gas, sealed refrigerant or a microwave oven: licensed person only'],
      remedy: 'hand it to a licensed person; no script runs on it',
    };
  }
  const events = sinceRepair(countingEvents(facts)).filter((event) => question.rigSimulated || !event.simulated);
  const needed = deadTestsFor(facts.unit.protectionClass);
  const upTo = question.before === undefined ? needed.length : needed.indexOf(question.before);
  const reasons: string[] = [];
  let passedAt = -1;
  for (const test of needed.slice(0, upTo < 0 ? needed.length : upTo)) {
    const results = events.filter(isCheckEvent).filter((event) => deadTestOf(event) === test);
    const standing = standingResult(results);
    if (!standing) {
      reasons.push(`${DEAD_TEST_TITLE[test]} is not done`);
      continue;
    }
    const verdict = verdictOf(standing);
    if (verdict === 'not done' && standing.kind === 'reading') {
      reasons.push(
        `${DEAD_TEST_TITLE[test]} has no discharge written down after it: discharge the machine, then do it again and discharge`,
      );
      continue;
    }
    if (verdict !== 'pass') {
      reasons.push(`${DEAD_TEST_TITLE[test]}: ${verdict}`);
      continue;
    }
    const inPlace = events.findIndex(
      (event, at) => at > passedAt && isCheckEvent(event) && deadTestOf(event) === test && verdictOf(event) === 'pass',
    );
    if (inPlace < 0) reasons.push(`${DEAD_TEST_TITLE[test]} was done out of order: do it again now`);
    else passedAt = inPlace;
  }
  if (reasons.length === 0) return OPEN;
  const override = events.findLast((event) => event.kind === 'override' && event.by.role === 'lead');
  // A lead's reason covers what the lead knew: not a test that failed afterwards.
  const lastBad = events.findLastIndex((event) => isCheckEvent(event) && deadTestOf(event) !== undefined && verdictOf(event) !== 'pass');
  if (override?.kind === 'override' && events.indexOf(override) > lastBad)
    return { open: true, reasons, override: { by: override.by.name, reason: override.reason } };
  const failed = reasons.some((reason) => /: (fail|inconclusive)$/.test(reason));
  return {
    open: false,
    reasons,
    remedy: failed
      ? 'mend it and record the repair, then do the dead tests again; or a lead overrides with a reason'
      : `do ${needed.map((test) => DEAD_TEST_TITLE[test]).join(', ')} in this order, dead and isolated; or a lead overrides with a reason`,
  };
}
