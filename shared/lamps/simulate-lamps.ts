import { normalFrom } from './seeded-random.js';

/** Some lamps lit for some time. */
export interface LampState {
  seconds: number;
  lit: readonly string[];
}

/** How an invented panel's light reaches an invented probe. Shares are of full scale unless said otherwise. */
export interface SimulatedLight {
  /** Panel order: neighbours glow into each other. */
  lamps: readonly string[];
  sampleRateHz: number;
  scaleMax: number;
  /** Level of each lamp while dark; 0.05 for one not named. */
  ambient?: Readonly<Record<string, number>>;
  /** What each lamp adds when lit; 0.6 for one not named. */
  amplitude?: Readonly<Record<string, number>>;
  /** Standard deviation of white noise on every level. */
  noise?: number;
  /** Share of a lit lamp's amplitude that its neighbours see. */
  glow?: number;
  /** Flicker of lit lamps, as a share of their amplitude, at this rate. */
  flicker?: { share: number; hertz: number };
  /** How far ambient light has risen, and gain changed (as a share), when the capture ends; straight in between. */
  ambientDrift?: number;
  gainDrift?: number;
  /** Lamps that never light. */
  burntOut?: readonly string[];
  /** Times at which a hand covers the probe, and the share of light that still comes through. */
  shadows?: readonly { fromS: number; toS: number; share: number }[];
  /** Time constant of a lamp's warm-up and cooling, seconds; 0.01 unless given. */
  riseS?: number;
  /** How much earlier or later than nominal a sample is taken, as a share of the interval: at most; 0.15 unless given. */
  jitter?: number;
  /** The chance that a sample is lost. */
  loss?: number;
  /** Times without any sample. */
  holes?: readonly { fromS: number; toS: number }[];
  /** The capture begins so many seconds into the states. */
  startS?: number;
}

export interface SimulatedSample {
  timeUs: number;
  levels: number[];
}

const USUAL_AMBIENT = 0.05;
const USUAL_AMPLITUDE = 0.6;
const USUAL_RISE_S = 0.01;
const USUAL_JITTER = 0.15;

/**
 * What a probe would see of a panel that goes through the given states: levels as they warm up, glow, flicker, drift and noise included.
 *
 * Lazy, in time order, until the states end. Random only through `random` (0 to below 1), so one seed gives one capture.
 *
 * @example [...simulateLamps([{ seconds: 0.02, lit: ['spin'] }], { lamps: ['spin'], sampleRateHz: 100, scaleMax: 1023 }, seededRandom(1))].length // 2
 */
export function* simulateLamps(
  states: readonly LampState[],
  light: SimulatedLight,
  random: () => number,
): Generator<SimulatedSample, void> {
  const startS = light.startS ?? 0;
  const totalS = states.reduce((sum, state) => sum + state.seconds, 0);
  const intervalS = 1 / light.sampleRateHz;
  const riseS = light.riseS ?? USUAL_RISE_S;
  const glowing = light.lamps.map(() => 0);
  let stateIndex = 0;
  let stateEndS = states[0]?.seconds ?? 0;
  let beforeS = Number.NEGATIVE_INFINITY;
  for (let index = 0; startS + index * intervalS < totalS; index += 1) {
    const jitterS = index === 0 ? 0 : (random() * 2 - 1) * (light.jitter ?? USUAL_JITTER) * intervalS;
    const atS = startS + index * intervalS + jitterS;
    while (stateIndex < states.length - 1 && atS >= stateEndS) {
      stateIndex += 1;
      stateEndS += states[stateIndex]?.seconds ?? 0;
    }
    const lit = states[stateIndex]?.lit ?? [];
    const nearing = beforeS === Number.NEGATIVE_INFINITY ? 1 : 1 - Math.exp(-(atS - beforeS) / Math.max(riseS, 1e-6));
    beforeS = atS;
    light.lamps.forEach((lamp, place) => {
      const goal = lit.includes(lamp) && !(light.burntOut ?? []).includes(lamp) ? 1 : 0;
      glowing[place] = (glowing[place] ?? 0) + (goal - (glowing[place] ?? 0)) * nearing;
    });
    const levels = light.lamps.map((_, place) =>
      levelOf(light, glowing, place, atS, (atS - startS) / Math.max(totalS - startS, 1e-9), random),
    );
    const inHole = (light.holes ?? []).some(({ fromS, toS }) => atS - startS >= fromS && atS - startS < toS);
    if (inHole || random() < (light.loss ?? 0)) continue;
    yield { timeUs: Math.max(0, Math.round((atS - startS) * 1e6)), levels };
  }
}

function levelOf(
  light: SimulatedLight,
  glowing: readonly number[],
  place: number,
  atS: number,
  progress: number,
  random: () => number,
): number {
  const amplitudeOf = (lamp: string | undefined): number => (lamp === undefined ? 0 : (light.amplitude?.[lamp] ?? USUAL_AMPLITUDE));
  const own = amplitudeOf(light.lamps[place]) * (glowing[place] ?? 0);
  const left = amplitudeOf(light.lamps[place - 1]) * (glowing[place - 1] ?? 0);
  const right = amplitudeOf(light.lamps[place + 1]) * (glowing[place + 1] ?? 0);
  const flicker = 1 + (light.flicker === undefined ? 0 : light.flicker.share * Math.sin(2 * Math.PI * light.flicker.hertz * atS));
  const gain = 1 + (light.gainDrift ?? 0) * progress;
  const ambient = (light.ambient?.[light.lamps[place] ?? ''] ?? USUAL_AMBIENT) + (light.ambientDrift ?? 0) * progress;
  const shadow =
    (light.shadows ?? []).find(({ fromS, toS }) => atS - (light.startS ?? 0) >= fromS && atS - (light.startS ?? 0) < toS)?.share ?? 1;
  const share = shadow * (ambient + gain * (own * flicker + (light.glow ?? 0) * (left + right))) + (light.noise ?? 0) * normalFrom(random);
  return Math.min(light.scaleMax, Math.max(0, Math.round(share * light.scaleMax)));
}
