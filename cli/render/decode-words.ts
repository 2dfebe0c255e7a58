import type { DecodeAnswer, Segment } from '../../shared/decode/answer.js';
import { lampFace } from '../../shared/lamps/face.js';
import type { Sheet } from '../../shared/sheet/schema.js';

const LIT = '●';
const DARK = '○';
/** A lamp outside the code: it may do anything. */
const OUTSIDE = '-';
const TIME_COLUMNS = 18;

/** A decoder's answer for people: the stretches in time order, each code with its lamp face, then what to know beside them. */
export function decodeInWords(file: string, answer: DecodeAnswer, sheet: Sheet): string {
  const lines = [
    `${file}  ${answer.durationS.toFixed(1)} s, ${answer.samples} samples${answer.lost > 0 ? `, ${answer.lost} lost` : ''}${answer.cut ? ', cut short' : ''}`,
  ];
  for (const segment of answer.segments) lines.push(...segmentLines(segment, sheet));
  if (answer.segments.length === 0) lines.push('  nothing to read');
  if (answer.deadLamps.length > 0) lines.push(`  burnt out: ${answer.deadLamps.join(', ')}`);
  for (const warning of answer.warnings) lines.push(`  note: ${warning}`);
  return `${lines.join('\n')}\n`;
}

function segmentLines(segment: Segment, sheet: Sheet): string[] {
  const time = `  ${segment.fromS.toFixed(1)} to ${segment.toS.toFixed(1)} s`.padEnd(TIME_COLUMNS);
  switch (segment.kind) {
    case 'ready':
      return [`${time}ready blink: service mode on`];
    case 'dark':
      return [`${time}dark`];
    case 'unreadable':
      return [
        `${time}unreadable: ${segment.reason}`,
        ...segment.candidates.map(({ code, confidence }) => `${' '.repeat(TIME_COLUMNS)}perhaps ${code}, ${confidence.toFixed(4)}`),
      ];
    case 'code': {
      const repeats = segment.repeats === undefined ? '' : `, ${segment.repeats === 1 ? 'once' : `${segment.repeats} times`}`;
      return [`${time}${segment.code}${repeats}, confidence ${segment.confidence.toFixed(4)}`, ...faceLines(segment.code, sheet)];
    }
  }
}

function faceLines(code: string, sheet: Sheet): string[] {
  const face = lampFace(code, sheet);
  if (face === undefined) return [];
  const indent = ' '.repeat(TIME_COLUMNS);
  return face.rows.map((row, index) => {
    const lamps = row.lit.map((lit) => (lit === null ? OUTSIDE : lit ? LIT : DARK)).join(' ');
    const sum = row.terms.length > 1 ? `${row.terms.join(' + ')} = ${row.digit}` : `${row.digit}`;
    const title = index === 0 && face.title !== undefined ? `    ${face.title}` : '';
    return `${indent}${row.letter.padEnd(2)} ${lamps}   ${sum}${title}`.trimEnd();
  });
}
