import type { DecodeAnswer } from '../../shared/decode/answer.js';
import { lampFace } from '../../shared/lamps/face.js';
import type { Sheet } from '../../shared/sheet/schema.js';
import type { Style } from '../output.js';
import { indented } from './columns.js';
import { faceLines } from './face-lines.js';
import { times } from './words.js';

const INDENT = ' '.repeat(11);

/** What a capture decoded to: each code with its lamp face and its fault, or why it can't be told, and what is odd about it. */
export function answerLines(answer: DecodeAnswer, sheet: Sheet, style: Style): string[] {
  const lines: string[] = [];
  for (const code of answer.codes) {
    const fault = sheet.faults.find((one) => one.code === code.code);
    const seen = `${code.repeats === undefined ? '' : `${times(code.repeats)}, `}confidence ${code.confidence.toFixed(4)}`;
    lines.push(`${INDENT}${style.ink.bold(code.code)}  ${seen}`, ...(fault ? indented([fault.title], style.columns) : []));
    const face = lampFace(code.code, sheet);
    if (face) lines.push(...faceLines(face, style).map((line) => `${INDENT.slice(1)}${line}`));
    if (fault?.first !== undefined) lines.push(...indented([fault.first], style.columns));
  }
  if (answer.segments.length === 0) lines.push(`${INDENT}nothing was recorded`);
  if (answer.codes.length === 0 && answer.segments.some(({ kind }) => kind === 'ready')) lines.push(`${INDENT}ready blink`);
  for (const segment of answer.segments) {
    if (segment.kind === 'unreadable')
      lines.push(...indented([`${segment.fromS.toFixed(0)} to ${segment.toS.toFixed(0)} s unreadable: ${segment.reason}`], style.columns));
  }
  return [...lines, ...indented(answer.warnings, style.columns)];
}
