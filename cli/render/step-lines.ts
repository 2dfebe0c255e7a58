import { formatLimits, formatReading, formatSpread } from '../../shared/measure/format-reading.js';
import { clock } from '../../shared/script/judge-watch.js';
import type { StepResult } from '../../shared/script/run-log.js';
import { stepVerdict } from '../../shared/script/run-verdict.js';
import { NO_CODE } from '../../shared/script/schema.js';
import type { Style } from '../output.js';
import { padLeft, padRight, shown, widthOf, wrap } from './columns.js';
import { repairText } from './repair-text.js';
import { verdictText } from './verdict.js';
import { timeText } from './words.js';

/** Titles get what the columns leave: 19 on a terminal of 80, no more than the longest needs. */
const REST = 61;
const TITLE = { least: 19, most: 40 };
const READING = 10;
const SPREAD = 6;
const LIMITS = 14;
const INDENT = 12;

/** Reading, spread and limit of a step, in words; the columns that are compared. */
function figures(result: StepResult): [string, string, string] {
  switch (result.kind) {
    case 'measure': {
      const { judgement, resolution } = result.reading;
      const { value, unit, low, high, expandedUncertainty } = judgement;
      return [
        formatReading(value, resolution, unit),
        formatSpread(expandedUncertainty, resolution),
        formatLimits(low, high, '', resolution),
      ];
    }
    case 'watch':
      return [clock(result.watched.seconds), '', result.watched.reason.replace(/^.*the sheet allows /, '')];
    case 'expect':
      return ['', '', result.expected === NO_CODE ? 'ready blink' : result.expected === 'any' ? 'any code' : result.expected];
    default:
      return ['', '', ''];
  }
}

/** What a step that judges nothing came to, in a word. */
function wordOf(result: StepResult): string {
  switch (result.kind) {
    case 'caution':
      return result.answer === 'yes' ? `confirmed ${timeText(result.endedAt)}` : `no ${timeText(result.endedAt)}`;
    case 'instruct':
      return `${result.answer} ${timeText(result.endedAt)}`;
    case 'cut':
      return `broken off ${timeText(result.endedAt)}; what came is kept`;
    case 'capture':
    case 'clear':
      return `ended ${timeText(result.endedAt)}`;
    case 'repair':
      return repairText(result.repair);
    case 'note':
      return result.text;
    case 'skipped':
      return result.judged ? '' : result.reason;
    default:
      return '';
  }
}

/** What stands under a step's line: why it was skipped, what was seen. */
function remark(result: StepResult): string | undefined {
  if (result.kind === 'skipped' && result.judged) return result.reason;
  if (result.kind === 'expect') return result.seen;
  if (result.kind === 'inspect') return result.inspection.note;
  if (result.kind === 'watch' && result.watched.verdict !== 'pass') return result.watched.reason;
  return undefined;
}

/** A step's result: its number, kind, title, then reading, spread, limit and verdict in columns. A long title has a line of its own. */
export function stepLines(number: number, result: StepResult, style: Style): string[] {
  const titleWidth = Math.min(TITLE.most, Math.max(TITLE.least, style.columns - REST));
  const kind = result.kind === 'skipped' ? result.stepKind : result.kind;
  const verdict = stepVerdict(result);
  const head = `${padLeft(String(number), 2)} ${padRight(kind, 8)} `;
  const [reading, spread, limits] = figures(result).map((text) => shown(text, style)) as [string, string, string];
  const tail = verdict === undefined || result.kind === 'caution' || result.kind === 'instruct' ? wordOf(result) : '';
  const compared = `${padLeft(reading, READING)} ${padRight(spread, SPREAD)} ${padRight(limits, LIMITS)} `;
  const sign = verdict === undefined ? '' : verdictText(verdict, style);
  const under = remark(result);
  const underLines =
    under === undefined ? [] : wrap(under, Math.max(20, style.columns - INDENT - 1)).map((line) => `${' '.repeat(INDENT)}${line}`);

  if (tail !== '') {
    const line = `${head}${padRight(result.title, titleWidth)}  ${tail}`;
    return widthOf(line) < style.columns
      ? [line, ...underLines]
      : [
          `${head}${result.title}`,
          ...wrap(tail, Math.max(20, style.columns - INDENT - 1)).map((text) => `${' '.repeat(INDENT)}${text}`),
          ...underLines,
        ];
  }
  const fits = widthOf(result.title) <= titleWidth;
  const lines = fits
    ? [`${head}${padRight(result.title, titleWidth)} ${compared}${sign}`]
    : [`${head}${result.title}`, `${' '.repeat(INDENT + titleWidth + 1)}${compared}${sign}`];
  return [...lines.map((line) => shown(line.trimEnd(), style)), ...underLines];
}
