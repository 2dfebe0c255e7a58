import type { Judgement } from '../../shared/measure/judge.js';
import type { Style } from '../output.js';

/** A scale leaves 60 % of the span between two limits on both sides; at most: 0 to 1.5 times; at least: 0 to 2.6 times. */
const SIDE = 0.6;
const AT_MOST_TO = 1.5;
const AT_LEAST_TO = 2.6;
const SCALE_COLUMNS = 60;

function endsOf({ low, high }: Pick<Judgement, 'low' | 'high'>): [number, number] {
  if (low !== undefined && high !== undefined) {
    const span = high - low || Math.abs(high) || 1;
    return [low - SIDE * span, high + SIDE * span];
  }
  if (high !== undefined) return high === 0 ? [-1, 1] : [Math.min(0, AT_MOST_TO * high), Math.max(0, AT_MOST_TO * high)];
  const least = low ?? 0;
  return least === 0 ? [-1, 1] : [Math.min(0, AT_LEAST_TO * least), Math.max(0, AT_LEAST_TO * least)];
}

/**
 * Three lines: a wedge over the axis where the reading is, the axis with its limits, the limits' values.
 * A reading off the scale is a wedge at the edge that points outwards.
 */
export function meterScale(
  judgement: Pick<Judgement, 'value' | 'low' | 'high' | 'verdict'>,
  { ink, unicode }: Pick<Style, 'ink' | 'unicode'>,
): string[] {
  const { value, low, high, verdict } = judgement;
  const [from, to] = endsOf(judgement);
  const columnOf = (at: number): number => Math.round(((at - from) / (to - from)) * (SCALE_COLUMNS - 1));
  const signs = unicode
    ? { wedge: '▼', left: '◀', right: '▶', axis: '─', inside: '━', limit: '┃' }
    : { wedge: 'V', left: '<', right: '>', axis: '-', inside: '=', limit: '|' };

  const off = value < from ? 'left' : value > to ? 'right' : undefined;
  const at = off === 'left' ? 0 : off === 'right' ? SCALE_COLUMNS - 1 : columnOf(value);
  const colour = verdict === 'pass' ? ink.green : verdict === 'fail' ? ink.red : ink.yellow;
  const wedge = `${' '.repeat(at)}${colour(signs[off ?? 'wedge'])}`;

  const lowAt = low === undefined ? -1 : columnOf(low);
  const highAt = high === undefined ? SCALE_COLUMNS : columnOf(high);
  const axis = Array.from({ length: SCALE_COLUMNS }, (_, column) => {
    if ((low !== undefined && column === lowAt) || (high !== undefined && column === highAt)) return signs.limit;
    return column > lowAt && column < highAt ? signs.inside : signs.axis;
  }).join('');

  let values = '';
  for (const [limit, column] of [
    [low, lowAt],
    [high, highAt],
  ] as const) {
    if (limit === undefined) continue;
    const text = String(limit);
    const start = Math.max(values.length > 0 ? values.length + 1 : 0, column - Math.floor(text.length / 2));
    values = `${values.padEnd(start)}${text}`;
  }
  return [wedge, axis, values];
}
