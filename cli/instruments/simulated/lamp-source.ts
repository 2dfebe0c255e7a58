import { normalFrom, seededRandom } from '../../../shared/lamps/seeded-random.js';
import type { LampStretch, Panel } from './scenario.js';
import type { SampleSource } from './simulated-probe.js';

/** How the invented panel keeps time: half a ready blink, and one phase of a code. */
const HALF_BLINK_SECONDS = 0.4;
const PHASE_SECONDS = 1.2;
/** What the invented probe sees, as parts of full scale: a dark lamp in the room's light, a lit one, the glow of a lit neighbour, its noise. */
const DARK_LEVEL = 0.05;
const LIT_LEVEL = 0.75;
const NEIGHBOUR_GLOW = 0.02;
const NOISE = 0.005;
/** How much earlier or later than nominal a sample is taken, as part of its period. */
const SAMPLE_JITTER = 0.03;

interface LampState {
  seconds: number;
  lit: ReadonlySet<string>;
}

/** Which lamps are lit, for how long, one state after the other. Never ends: the last stretch goes on. */
export function* lampStates(plan: readonly LampStretch[], panel: Panel): Generator<LampState, never> {
  for (const stretch of plan) yield* statesOf(stretch, panel);
  const last = plan.at(-1);
  for (;;) {
    if (last === undefined) yield { seconds: 1, lit: new Set() };
    else yield* statesOf(last, panel);
  }
}

/** When the technician presses "next" while a plan is shown, in microseconds from its start. */
export function marksIn(plan: readonly LampStretch[], panel: Panel): number[] {
  let atSeconds = 0;
  const marks: number[] = [];
  for (const stretch of plan) {
    if (stretch.show === 'code' && stretch.next) marks.push(Math.round(atSeconds * 1_000_000));
    for (const { seconds } of statesOf(stretch, panel)) atSeconds += seconds;
  }
  return marks;
}

/** What a probe sees of a plan: levels a lamp, in the panel's order, unevenly spaced and noisy, as long as somebody looks. */
export function* lampSamples(
  plan: readonly LampStretch[],
  panel: Panel,
  options: { sampleRateHz: number; scaleMax: number; seed: number },
): SampleSource {
  const random = seededRandom(options.seed);
  const periodUs = 1_000_000 / options.sampleRateHz;
  const states = lampStates(plan, panel);
  let state = states.next().value;
  let stateEndsUs = state.seconds * 1_000_000;
  for (let index = 0; ; index += 1) {
    const tUs = index === 0 ? 0 : Math.round((index + (random() * 2 - 1) * SAMPLE_JITTER) * periodUs);
    while (tUs >= stateEndsUs) {
      state = states.next().value;
      stateEndsUs += state.seconds * 1_000_000;
    }
    const isLit = (lamp: string | undefined): number => (lamp !== undefined && state.lit.has(lamp) ? 1 : 0);
    const levels = panel.lamps.map((lamp, place) => {
      const glow = isLit(panel.lamps[place - 1]) + isLit(panel.lamps[place + 1]);
      const seen = DARK_LEVEL + (LIT_LEVEL - DARK_LEVEL) * isLit(lamp) + NEIGHBOUR_GLOW * glow + NOISE * normalFrom(random);
      return Math.max(0, Math.min(options.scaleMax, Math.round(seen * options.scaleMax)));
    });
    yield { tUs, levels };
  }
}

function statesOf(stretch: LampStretch, panel: Panel): LampState[] {
  switch (stretch.show) {
    case 'lit':
      return [{ seconds: stretch.seconds, lit: new Set(stretch.lamps) }];
    case 'ready': {
      const blink = [
        { seconds: HALF_BLINK_SECONDS, lit: new Set(panel.ready) },
        { seconds: HALF_BLINK_SECONDS, lit: new Set<string>() },
      ];
      return Array.from({ length: Math.ceil(stretch.seconds / (2 * HALF_BLINK_SECONDS)) }, () => blink).flat();
    }
    case 'code': {
      const shown = [
        { seconds: PHASE_SECONDS, lit: new Set([panel.selector, ...lampsAddingUpTo(stretch.on, panel)]) },
        { seconds: PHASE_SECONDS, lit: new Set(lampsAddingUpTo(stretch.off, panel)) },
      ];
      return Array.from({ length: stretch.repeats }, () => shown).flat();
    }
  }
}

/** Largest weight first: with weights that are powers of two that is the only way. */
function lampsAddingUpTo(digit: number, panel: Panel): string[] {
  let left = digit;
  return Object.entries(panel.weights)
    .sort(([, one], [, other]) => other - one)
    .filter(([, weight]) => {
      if (weight > left) return false;
      left -= weight;
      return true;
    })
    .map(([lamp]) => lamp);
}
