/** The sign of a unit whose name is spelled in plain letters in files; any other unit is shown as it is. µ is U+00B5, Ω is U+03A9: the code points our faces have. */
const UNIT_SIGNS: Readonly<Record<string, string>> = {
  ohm: '\u03a9',
  mohm: 'm\u03a9',
  kohm: 'k\u03a9',
  Mohm: 'M\u03a9',
  Gohm: 'G\u03a9',
  uF: '\u00b5F',
  uA: '\u00b5A',
  uV: '\u00b5V',
  degC: '°C',
};

/** Limits are shown with three figures where the meter has that many. */
const LIMIT_FIGURES = 3;
/** More decimals than any meter on a bench has; also where a search for them stops. */
const MOST_DECIMALS = 15;

/**
 * The sign a unit is shown with.
 *
 * @example unitSign('Mohm') // 'MΩ'
 * @example unitSign('V') // 'V'
 */
export function unitSign(unit: string): string {
  return UNIT_SIGNS[unit] ?? unit;
}

/**
 * How many decimals a meter with this resolution shows. A resolution of 0 means unknown and gives `undefined`.
 *
 * @example decimalsOf(0.01) // 2
 * @example decimalsOf(10) // 0
 */
export function decimalsOf(resolution: number): number | undefined {
  if (!(resolution > 0)) return undefined;
  const [mantissa = '', exponent = '0'] = String(resolution).split('e');
  for (let decimals = 0; decimals < MOST_DECIMALS; decimals += 1) {
    const scaled = Number(`${mantissa}e${Number(exponent) + decimals}`);
    if (Math.abs(scaled - Math.round(scaled)) <= 1e-9 * scaled) return decimals;
  }
  return MOST_DECIMALS;
}

/**
 * A reading as it is shown everywhere: to the meter's own resolution, a blank, the sign of the unit.
 *
 * Only for showing; verdicts come from unrounded values. An unknown resolution (0) shows the number in full. An empty unit is left out.
 *
 * @example formatReading(157.7, 0.1, 'ohm') // '157.7 Ω'
 * @example formatReading(12414, 10, 'ohm') // '12410 Ω'
 */
export function formatReading(value: number, resolution: number, unit: string): string {
  return withUnit(roundedTo(value, resolution), unit);
}

/**
 * The expanded uncertainty beside its reading, to the same decimal. One that is not 0 is never shown as 0: it gets the decimals it needs.
 *
 * @example formatSpread(1.2569, 0.1) // '±1.3'
 * @example formatSpread(0.0092, 0.001, 'ohm') // '±0.009 Ω'
 */
export function formatSpread(expandedUncertainty: number, resolution: number, unit = ''): string {
  const rounded = roundedTo(expandedUncertainty, resolution);
  const vanished = expandedUncertainty > 0 && Number(rounded) === 0;
  return withUnit(`±${vanished ? plain(Number(expandedUncertainty.toPrecision(1))) : rounded}`, unit);
}

/**
 * Limits in words: no signs, so that they can be read aloud and are in every font.
 *
 * Three figures where the meter's resolution has them, both limits to the same decimal, never rounded away from what was set.
 * An unknown resolution (0, the default) shows the limits as they were written. An empty unit is left out.
 *
 * @example formatLimits(undefined, 3.5, 'mA', 0.01) // 'at most 3.50 mA'
 * @example formatLimits(1, undefined, 'Mohm', 0.01) // 'at least 1.00 MΩ'
 * @example formatLimits(140, 180, 'ohm', 0.1) // '140 to 180 Ω'
 */
export function formatLimits(low: number | undefined, high: number | undefined, unit: string, resolution = 0): string {
  const decimals = Math.max(...[low, high].map((limit) => (limit === undefined ? 0 : limitDecimals(limit, decimalsOf(resolution) ?? 0))));
  const shown = (limit: number): string => minus(limit.toFixed(decimals));
  if (low !== undefined && high !== undefined)
    return withUnit(low === high ? `exactly ${shown(low)}` : `${shown(low)} to ${shown(high)}`, unit);
  if (high !== undefined) return withUnit(`at most ${shown(high)}`, unit);
  if (low !== undefined) return withUnit(`at least ${shown(low)}`, unit);
  return 'no limits';
}

function limitDecimals(limit: number, meterDecimals: number): number {
  const wholeDigits = limit === 0 ? 1 : Math.floor(Math.log10(Math.abs(limit))) + 1;
  const wanted = Math.min(meterDecimals, Math.max(0, LIMIT_FIGURES - wholeDigits));
  const written = decimalsOf(Math.abs(limit)) ?? 0;
  return Math.max(wanted, written);
}

function roundedTo(value: number, resolution: number): string {
  const decimals = decimalsOf(resolution);
  if (decimals === undefined) return plain(value);
  // A reading of 3.445 at 0.01 is 344.49999999999994 steps: lift it over the round-off before rounding, away from zero as meters do.
  const steps = Math.round((Math.abs(value) / resolution) * (1 + 4 * Number.EPSILON));
  const rounded = (steps * resolution).toFixed(decimals);
  return value < 0 && Number(rounded) !== 0 ? minus(`-${rounded}`) : rounded;
}

/** All digits that a number needs, without an exponent. */
function plain(value: number): string {
  return minus(value === 0 ? '0' : value.toFixed(decimalsOf(Math.abs(value)) ?? 0));
}

/** The minus sign of print, U+2212: as wide as a digit, so columns keep their places. */
function minus(text: string): string {
  return text.replace(/^-/, '\u2212');
}

function withUnit(number: string, unit: string): string {
  return unit === '' ? number : `${number} ${unitSign(unit)}`;
}
