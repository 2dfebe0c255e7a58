import { MEASURE_COMMANDS } from '../meter.js';
import { SimulatedScpi } from './simulated-scpi.js';

/** What the probes touch, as one measurement: a value in the meter's base unit, or a way of having none. */
export type Measured = number | 'overload' | 'nan' | 'timeout' | 'garbage' | 'unplugged';

/** Nine figures, as NR3. */
const NR3_DECIMALS = 8;

/** A bench meter: answers MEASure and READ? with whatever `next` says the probes touch. */
export class SimulatedMeter extends SimulatedScpi {
  constructor(identification: string, next: (unit: string) => Measured, unplug: () => void) {
    let lastUnit = 'ohm';
    const measure = (unit: string): string | undefined => {
      lastUnit = unit;
      const measured = next(unit);
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
        default:
          return nr3(measured);
      }
    };
    const queries = new Map(Object.values(MEASURE_COMMANDS).map(({ query, unit }) => [query, unit]));
    super(identification, [
      ...[...queries].map(([query, unit]) => ({ pattern: query, run: () => measure(unit) })),
      { pattern: 'READ?', run: () => measure(lastUnit) },
    ]);
  }
}

/** `+9.64000000E+01`: sign, point, exponent of two digits at least (IEEE 488.2, NR3). */
function nr3(value: number): string {
  const [mantissa = '', exponent = '+0'] = Math.abs(value).toExponential(NR3_DECIMALS).split('e');
  return `${value < 0 ? '-' : '+'}${mantissa}E${exponent.startsWith('-') ? '-' : '+'}${exponent.slice(1).padStart(2, '0')}`;
}
