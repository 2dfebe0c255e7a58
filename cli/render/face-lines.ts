import type { LampFace } from '../../shared/lamps/face.js';
import type { Style } from '../output.js';
import { padRight, shown } from './columns.js';
import { lampSign } from './lanes.js';

/**
 * A code's lamp face: a row a phase, the lamps in panel order as the technician sees them, the selector apart, then the sum spelled out.
 * `beside` stands to the right of each row.
 */
export function faceLines(face: LampFace, style: Style, beside: readonly string[] = []): string[] {
  const groups = face.lamps.map((lamp, index) => (index > 0 && face.lamps[index - 1]?.group !== lamp.group ? '  ' : ''));
  return face.rows.map((row, index) => {
    const lamps = face.lamps.flatMap((lamp, column) => {
      const lit = row.lit[column];
      return lamp.group === 'outside' || lit === null || lit === undefined
        ? []
        : [`${groups[column] ?? ''}${lampSign(lit, lamp.colour, style)}`];
    });
    const sum = `${row.terms.length === 0 ? '0' : row.terms.join(' + ')} = ${style.ink.bold(String(row.digit))}`;
    return shown(` ${padRight(row.letter, 2)} ${lamps.join(' ')}   ${padRight(sum, 12)} ${beside[index] ?? ''}`.trimEnd(), style);
  });
}
