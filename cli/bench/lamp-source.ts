import type { CaptureHeader } from '../../shared/lamps/capture.js';
import type { Sheet } from '../../shared/sheet/schema.js';
import type { OpenRig, ProbeEvent } from '../instruments/rig.js';

/** Where lamp levels come from: a light probe, or a technician's fingers. */
export interface LampSource {
  header: Pick<CaptureHeader, 'source' | 'scale' | 'sampleRateHz' | 'clock'>;
  /** Levels and gaps until `signal` aborts; the probe is stopped then, whatever ended it. `notice` takes what is said while it is waited for. */
  read(signal: AbortSignal, notice?: (line: string) => void): AsyncGenerator<ProbeEvent, void, undefined>;
  /** When the technician of a simulated rig presses `next`, in microseconds. */
  simulatedMarks: readonly number[];
  /** Takes a key and says whether it meant something here. */
  takeKey(key: string): boolean;
  /** Microseconds since the start where time passes without samples; undefined where the last sample tells the time. */
  elapsedUs(): number | undefined;
}

/** The light probe of a rig, one column a lamp of the sheet. Opens its port. */
export async function probeSource(rig: OpenRig, sheet: Sheet): Promise<LampSource> {
  const probe = await rig.openProbe(sheet.lamps.map((lamp) => lamp.id));
  return {
    header: {
      source: rig.simulated ? 'simulated' : 'probe',
      scale: { unit: 'counts', max: probe.scaleMax },
      sampleRateHz: probe.sampleRateHz,
      clock: 'probe',
    },
    read: (signal, notice) => probe.read(signal, notice),
    simulatedMarks: rig.hands?.marks() ?? [],
    takeKey: () => false,
    elapsedUs: () => undefined,
  };
}

/** A keyboard has nine digits that can stand for lamps. */
export const MOST_KEY_LAMPS = 9;
/** No light level is measured: a lamp is on or off. */
const KEYS_FULL_SCALE = 1;

/** No probe at hand: keys 1, 2, 3 … turn the lamps on and off in panel order. A sample stands wherever a lamp changed. */
export function keySource(sheet: Sheet, nowUs: () => number = () => performance.now() * 1000): LampSource {
  const levels = sheet.lamps.map(() => 0);
  const waiting: ProbeEvent[] = [];
  let startedUs: number | undefined;
  let wake = (): void => undefined;
  const elapsed = (): number => (startedUs === undefined ? 0 : Math.round(nowUs() - startedUs));
  const note = (): void => {
    waiting.push({ kind: 'sample', tUs: elapsed(), levels: [...levels] });
    wake();
  };
  return {
    header: { source: 'keys', scale: { unit: 'state', max: KEYS_FULL_SCALE }, clock: 'bench' },
    async *read(signal) {
      startedUs = nowUs();
      signal.addEventListener('abort', () => wake());
      note();
      while (!signal.aborted) {
        yield* waiting.splice(0);
        if (waiting.length === 0 && !signal.aborted) await new Promise<void>((resolve) => (wake = resolve));
      }
      yield* waiting.splice(0);
    },
    simulatedMarks: [],
    takeKey(key) {
      const lamp = /^[1-9]$/.test(key) ? Number(key) - 1 : -1;
      const level = levels[lamp];
      if (level === undefined) return false;
      levels[lamp] = level === 0 ? KEYS_FULL_SCALE : 0;
      note();
      return true;
    },
    elapsedUs: elapsed,
  };
}
