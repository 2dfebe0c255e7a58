import { wrap } from '../render/columns.js';
import type { Bench } from './bench.js';

const INDENT = 11;

/** A text, or a procedure of the sheet with its cautions, its steps and what answers it. */
export function procedureLines(
  procedureId: string | undefined,
  text: string | undefined,
  { unit, style }: Pick<Bench, 'unit' | 'style'>,
): string[] {
  const width = Math.max(20, style.columns - INDENT - 4);
  const indented = (lines: readonly string[], first = ''): string[] =>
    lines.map((line, index) => `${' '.repeat(INDENT)}${index === 0 ? first : ' '.repeat(first.length)}${line}`);
  const procedure = unit.sheet.procedures.find(({ id }) => id === procedureId);
  return [
    ...(text === undefined ? [] : indented(wrap(text, width))),
    ...(procedure?.cautions.flatMap((caution) => indented(wrap(caution, width)).map((line) => style.ink.bold(line))) ?? []),
    ...(procedure?.withinS === undefined ? [] : indented([`Within ${procedure.withinS} s:`])),
    ...(procedure?.steps.flatMap((step, index) => indented(wrap(step, width), `${index + 1}. `)) ?? []),
    ...(procedure?.answeredBy === undefined ? [] : indented(wrap(`Then: ${procedure.answeredBy}`, width))),
  ];
}
