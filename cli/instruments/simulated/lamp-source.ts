import { codeStates, readyBlinkStates } from '../../../shared/lamps/panel-states.js';
import { seededRandom } from '../../../shared/lamps/seeded-random.js';
import { simulateLamps, type LampState } from '../../../shared/lamps/simulate-lamps.js';
import type { LampStretch, Panel } from './scenario.js';
import type { SampleSource } from './simulated-probe.js';

/** How the invented panel keeps time. */
const BLINK_SECONDS = 0.8;
const PHASE_SECONDS = 1.2;
/** What the invented probe sees, as shares of full scale: its noise, and how much of a lit lamp's light its neighbours show. */
const NOISE = 0.005;
const NEIGHBOUR_GLOW = 0.03;
/** How much earlier or later than nominal a sample is taken, as a share of its period. */
const SAMPLE_JITTER = 0.03;
/** Nobody looks at one step for longer. */
const LONGEST_LOOK_SECONDS = 3600;

/** When the technician presses "next" while a plan is shown, in microseconds from its start. */
export function marksIn(plan: readonly LampStretch[], panel: Panel): number[] {
  let atSeconds = 0;
  const marks: number[] = [];
  for (const stretch of plan) {
    if (stretch.show === 'code' && stretch.next) marks.push(Math.round(atSeconds * 1_000_000));
    atSeconds += secondsOf(statesOf(stretch, panel));
  }
  return marks;
}

/** What a probe sees of a plan: levels a lamp, in the panel's order, unevenly spaced and noisy, as long as somebody looks. */
export function* lampSamples(
  plan: readonly LampStretch[],
  panel: Panel,
  options: { sampleRateHz: number; scaleMax: number; seed: number },
): SampleSource {
  const { sampleRateHz, scaleMax, seed } = options;
  const light = { lamps: panel.lamps, sampleRateHz, scaleMax, noise: NOISE, glow: NEIGHBOUR_GLOW, jitter: SAMPLE_JITTER };
  for (const { timeUs, levels } of simulateLamps(wholeLook(plan, panel), light, seededRandom(seed))) yield { tUs: timeUs, levels };
}

/** The plan, and its last stretch over and over for as long as anybody looks. */
function wholeLook(plan: readonly LampStretch[], panel: Panel): LampState[] {
  const states = plan.flatMap((stretch) => statesOf(stretch, panel));
  const lastStretch = plan.at(-1);
  const last = lastStretch ? statesOf(lastStretch, panel) : [{ seconds: 1, lit: [] }];
  const times = Math.ceil(Math.max(0, LONGEST_LOOK_SECONDS - secondsOf(states)) / secondsOf(last));
  return [...states, ...Array.from({ length: times }, () => last).flat()];
}

const secondsOf = (states: readonly LampState[]): number => states.reduce((sum, { seconds }) => sum + seconds, 0);

function statesOf(stretch: LampStretch, panel: Panel): LampState[] {
  switch (stretch.show) {
    case 'lit':
      return [{ seconds: stretch.seconds, lit: stretch.lamps }];
    case 'ready':
      return readyBlinkStates(panel.ready, Math.ceil(stretch.seconds / BLINK_SECONDS), BLINK_SECONDS);
    case 'code':
      return codeStates(panel, stretch.on, stretch.off, Array<number>(2 * stretch.repeats).fill(PHASE_SECONDS));
  }
}
