import type { Accuracy } from '../../shared/measure/parse-accuracy.js';
import { assembleRig } from './assemble-rig.js';
import type { Quantity } from './meter.js';
import type { Patience } from './patience.js';
import { loadRig } from './rig-file.js';
import type { ProbeEvent } from './sample-timeline.js';
import type { Hands } from './simulated/hands.js';

export type { ProbeEvent } from './sample-timeline.js';
export type { Quantity } from './meter.js';
export type { Patience } from './patience.js';
export type { Hands } from './simulated/hands.js';

/** The light probe, its columns in the order of the lamps that were asked for. */
export interface Probe {
  readonly id: string;
  readonly identification: string;
  readonly sensorCount: number;
  readonly sampleRateHz: number;
  readonly scaleMax: number;
  /**
   * Samples and gaps until `signal` aborts, times from the start of this reading. The probe is stopped at the end, whatever ended it.
   * A probe that is unplugged is waited for, if the rig has patience: then there is a gap. `notice` takes what is said meanwhile.
   */
  read(signal: AbortSignal, notice?: (line: string) => void): AsyncGenerator<ProbeEvent, void, undefined>;
  close(): Promise<void>;
}

/** A meter that is open for one quantity. */
export interface Meter {
  readonly id: string;
  readonly identification: string;
  /** The unit of everything here. */
  readonly unit: string;
  /** Accuracy and resolution in the range of the last reading (before the first one: in the smallest range). */
  readonly accuracy: Accuracy;
  readonly accuracyText: string;
  readonly resolution: number;
  /** One reading in `unit`. Throws an InstrumentError for everything that is none: overload, not a number, time-out, unplugged, garbage. */
  measure(): Promise<number>;
  close(): Promise<void>;
}

export interface Measuring {
  /**
   * The machine is on mains, or the measurement puts voltage on it: it is asked for once and never again by itself.
   * Unless told: for an insulation resistance, and for nothing else.
   */
  energises?: boolean;
}

export interface OpenRig {
  readonly name: string;
  readonly simulated: boolean;
  /** Which instrument would measure this, without opening a port; undefined where the reading must be typed in. */
  meterInfo(quantity: Quantity): { id: string; kind: string; unit: string } | undefined;
  hasProbe(): boolean;
  /** Opens the probe, one column a lamp. A port that is open already is used again. */
  openProbe(lampIds: readonly string[]): Promise<Probe>;
  /** Opens the meter for a quantity; readings come in `unit` (the rig file's unit unless told). A port that is open already is used again. */
  openMeterFor(quantity: Quantity, unit?: string, measuring?: Measuring): Promise<Meter>;
  /** The simulated technician; only on a simulated rig. */
  readonly hands?: Hands;
  /** Puts the probe in its safe state and closes every port. */
  close(): Promise<void>;
}

/** A rig whose name begins with this is simulated. */
export const SIMULATED_PREFIX = 'sim:';

/**
 * The rig of this bench: `rig.yaml` in `home`, or the rig file that `choice` names, or for `sim:NAME` a simulated one.
 * No port is opened before openProbe or openMeterFor is called. With `patience` an instrument that is unplugged is waited for.
 */
export async function openRig(choice: string | undefined, home: string, patience?: Patience): Promise<OpenRig> {
  if (choice?.startsWith(SIMULATED_PREFIX) === true) {
    const { simulateRig } = await import('./simulated/simulated-rig.js');
    return simulateRig(choice.slice(SIMULATED_PREFIX.length), patience);
  }
  return assembleRig(await loadRig(home, choice), {}, patience);
}
