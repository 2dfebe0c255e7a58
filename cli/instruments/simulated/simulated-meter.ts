import { MEASURE_COMMANDS } from '../meter.js';
import type { Measured } from './scenario.js';
import { SimulatedScpi } from './simulated-scpi.js';

export type { Measured } from './scenario.js';

/** Nine figures, as NR3. */
const NR3_DECIMALS = 8;
/** An older value that stands before the one that was asked for. */
const STALE_SHARE = 0.5;

export interface SimulatedMeterOptions {
  /** Pulls the plug; for so many seconds, or just for a moment. */
  unplug: (seconds?: number) => void;
  /** How long after its question a late answer comes: longer than anybody waits for one. */
  lateMs?: number;
}

/** A bench meter: answers MEASure and READ? with whatever `next` says the probes touch. */
export class SimulatedMeter extends SimulatedScpi {
  constructor(identification: string, next: (unit: string) => Measured, { unplug, lateMs = 500 }: SimulatedMeterOptions) {
    let lastUnit = 'ohm';
    const measure = (unit: string): string | undefined => {
      lastUnit = unit;
      const measured = next(unit);
      if (typeof measured === 'number') return nr3(measured);
      if (typeof measured === 'string') return wordless(measured, unplug);
      if ('unplugged' in measured) {
        unplug(measured.unplugged);
        return undefined;
      }
      if ('late' in measured) return this.answerLater(`${nr3(measured.late)}\n`, lateMs);
      if ('twice' in measured) return `${nr3(measured.twice)}\n${nr3(measured.twice)}`;
      if ('stale' in measured) return `${nr3(measured.stale * STALE_SHARE)}\n${nr3(measured.stale)}`;
      if ('nuls' in measured) return `\0\0${nr3(measured.nuls)}\0`;
      return this.answerLater(nr3(measured.half).slice(0, 4), 0);
    };
    const queries = new Map(Object.values(MEASURE_COMMANDS).map(({ query, unit }) => [query, unit]));
    super(identification, [
      ...[...queries].map(([query, unit]) => ({ pattern: query, run: () => measure(unit) })),
      { pattern: 'READ?', run: () => measure(lastUnit) },
    ]);
  }
}

/** What is said where there is no value. */
function wordless(measured: Extract<Measured, string>, unplug: () => void): string | undefined {
  switch (measured) {
    case 'overload':
      return '+9.90000000E+37';
    case 'nan':
      return '+9.91000000E+37';
    case 'garbage':
      return '\u00ff?#1,,7E';
    case 'unplugged':
      unplug();
      return undefined;
    case 'timeout':
      return undefined;
  }
}

/** `+9.64000000E+01`: sign, point, exponent of two digits at least (IEEE 488.2, NR3). */
function nr3(value: number): string {
  const [mantissa = '', exponent = '+0'] = Math.abs(value).toExponential(NR3_DECIMALS).split('e');
  return `${value < 0 ? '-' : '+'}${mantissa}E${exponent.startsWith('-') ? '-' : '+'}${exponent.slice(1).padStart(2, '0')}`;
}
