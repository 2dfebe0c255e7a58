import normalCdf from '@stdlib/stats-base-dists-normal-cdf';

/**
 * How likely the true value lies inside the limits, given one reading and its standard uncertainty.
 *
 * The true value is taken as normally distributed about the reading, with u as its standard deviation:
 * p = Φ((high − value)/u) − Φ((low − value)/u). A limit that is not given drops its term. All in one unit.
 * With u = 0 the answer is 1 inside or on a limit and 0 outside. Assumes low ≤ high and u ≥ 0.
 * Source: JCGM 106:2012, clause 7.
 *
 * @example conformanceProbability({ value: 10, standardUncertainty: 0.4, low: 9, high: 11 }) // 0.98758
 */
export function conformanceProbability(reading: {
  value: number;
  standardUncertainty: number;
  low?: number | undefined;
  high?: number | undefined;
}): number {
  const { value, standardUncertainty } = reading;
  const low = reading.low ?? -Infinity;
  const high = reading.high ?? Infinity;
  if (standardUncertainty === 0) return value >= low && value <= high ? 1 : 0;
  const fromLow = (low - value) / standardUncertainty;
  const toHigh = (high - value) / standardUncertainty;
  // Below the limits both terms are next to 1 and their difference would drown in round-off: take the mirror image.
  const inside = fromLow > 0 ? standardNormal(-fromLow) - standardNormal(-toHigh) : standardNormal(toHigh) - standardNormal(fromLow);
  return Math.min(1, Math.max(0, inside));
}

/**
 * Φ(x): the chance that a standard normal variable is at most x.
 *
 * @example standardNormal(1) // 0.841344746068543 (Abramowitz and Stegun, table 26.1)
 */
export function standardNormal(x: number): number {
  return normalCdf(x, 0, 1);
}
