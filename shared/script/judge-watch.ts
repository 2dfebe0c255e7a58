import type { DecodeView } from '../decode/answer.js';
import type { CaptureHole } from '../lamps/holes.js';
import type { CalibrationBody } from '../history/events.js';
import type { Sheet } from '../sheet/schema.js';
import type { StepOf } from './schema.js';

/** What a watch waits for: a lamp pattern that begins it, one that ends it, and how long that may take. */
export interface WatchSpec {
  begins: Readonly<Record<string, 'on' | 'off'>>;
  ends: Readonly<Record<string, 'on' | 'off'>>;
  withinS: readonly [number, number];
}

/** How long the ending pattern must hold before it is believed: several times the dark half of a slow blink (0.4 Hz: 1.25 s). */
const ENDED_HOLD_SECONDS = 5;

/**
 * The spec of a watch step. A calibration run begins when the lock lamp lights and ends well when the lid unlocks and the
 * machine switches itself off: every lamp dark (common practice, no published source).
 */
export function watchSpec(step: StepOf<'watch'>, sheet: Sheet): WatchSpec {
  if (step.calibration && sheet.calibration) {
    const dark = Object.fromEntries(sheet.lamps.map((lamp) => [lamp.id, 'off' as const]));
    return { begins: { [sheet.calibration.lockLamp]: 'on' }, ends: dark, withinS: sheet.calibration.durationS };
  }
  return { begins: step.begins ?? {}, ends: step.ends ?? {}, withinS: step.withinS ?? [0, 0] };
}

/** An edge is told within this (contract, section 3). */
const EDGE_SECONDS = 0.5;

type Lit = readonly { fromS: number; toS: number }[];
const litAt = (lit: Lit, atS: number): boolean => lit.some((stretch) => stretch.fromS <= atS && atS < stretch.toS);

/**
 * Whether and when a lamp pattern came and went within its time.
 *
 * Takes the lit stretches of each lamp (`viewCapture`), the spec, how long the capture is in seconds, and its holes (`holesOf`).
 * Pass: begun, and ended no sooner than the least and no later than the most. Fail: ended outside that, or still going past the most.
 * Inconclusive: never begun, the capture stopped before it could end, or nothing was seen when it mattered: while an end could have
 * come and gone, or around an edge on which the verdict depends. `over` says that nothing later can change the verdict.
 *
 * @example judgeWatch(view, spec, 170).verdict // 'pass', with seconds 150
 */
export function judgeWatch(
  view: DecodeView,
  spec: WatchSpec,
  durationS: number,
  holes: readonly CaptureHole[] = [],
): Pick<CalibrationBody, 'seconds' | 'verdict' | 'reason'> & { over: boolean; begun: boolean } {
  const lampOf = (id: string): Lit => view.lamps.find((lamp) => lamp.id === id)?.lit ?? [];
  const holds = (pattern: WatchSpec['begins'], atS: number): boolean =>
    Object.entries(pattern).every(([id, state]) => litAt(lampOf(id), atS) === (state === 'on'));
  const edges = [
    ...new Set([0, ...Object.keys({ ...spec.begins, ...spec.ends }).flatMap((id) => lampOf(id).flatMap(({ fromS, toS }) => [fromS, toS]))]),
  ].sort((a, b) => a - b);
  const [leastS, mostS] = spec.withinS;

  const beganS = edges.find((atS) => holds(spec.begins, atS));
  if (beganS === undefined) return { seconds: 0, verdict: 'inconclusive', reason: 'it never began', over: false, begun: false };
  // The end holds to the last sample: a dropout on the way is no end.
  const lastBroken = edges.findLastIndex((atS) => !holds(spec.ends, atS));
  const heldFromS = edges[lastBroken + 1];
  const endedS =
    heldFromS !== undefined && heldFromS > beganS && seenAfter(heldFromS, durationS, holes) >= ENDED_HOLD_SECONDS ? heldFromS : undefined;
  const blind = holes.find(({ fromS, toS }) => toS - fromS >= ENDED_HOLD_SECONDS && fromS > beganS && toS < (endedS ?? durationS));
  if (endedS === undefined) {
    const seconds = durationS - beganS;
    const late = seconds > mostS + ENDED_HOLD_SECONDS;
    if (late && blind) return { seconds, verdict: 'inconclusive', reason: blindReason(blind), over: true, begun: true };
    return {
      seconds,
      verdict: late ? 'fail' : 'inconclusive',
      reason: late ? `still going after ${mostS} s` : `stopped after ${Math.floor(seconds)} s, before it ended`,
      over: late,
      begun: true,
    };
  }
  const seconds = endedS - beganS;
  if (blind) return { seconds, verdict: 'inconclusive', reason: blindReason(blind), over: true, begun: true };
  // What changed while nothing was seen shows at the end of the hole; it may have changed at its beginning.
  const inHole = (edgeS: number): number => {
    const hole = holes.find(({ toS }) => Math.abs(toS - edgeS) <= EDGE_SECONDS);
    return hole === undefined ? 0 : edgeS - hole.fromS;
  };
  const isInside = (length: number): boolean => length >= leastS && length <= mostS;
  const verdict = isInside(seconds) ? 'pass' : 'fail';
  const [shortest, longest] = [seconds - inHole(endedS), seconds + inHole(beganS)];
  if (isInside(shortest) !== isInside(seconds) || isInside(longest) !== isInside(seconds))
    return {
      seconds,
      verdict: 'inconclusive',
      reason: `between ${clock(shortest)} and ${clock(longest)}: nothing was seen when it ${inHole(endedS) > 0 ? 'ended' : 'began'}`,
      over: true,
      begun: true,
    };
  return { seconds, verdict, reason: `${clock(seconds)}, the sheet allows ${clock(leastS)} to ${clock(mostS)}`, over: true, begun: true };
}

/** How much was seen from a time on. */
function seenAfter(fromS: number, durationS: number, holes: readonly CaptureHole[]): number {
  const unseen = holes.reduce((sum, hole) => sum + Math.max(0, hole.toS - Math.max(hole.fromS, fromS)), 0);
  return durationS - fromS - unseen;
}

const blindReason = ({ fromS, toS }: CaptureHole): string =>
  `nothing was seen from ${clock(fromS)} to ${clock(toS)}: an end may have come and gone`;

/** Minutes and seconds as they are read off a clock: 150 is 2:30. */
export const clock = (seconds: number): string =>
  `${Math.floor(Math.round(seconds) / 60)}:${String(Math.round(seconds) % 60).padStart(2, '0')}`;
