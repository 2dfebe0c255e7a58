import type { UnitEvent } from '../../shared/history/events.js';
import { formatLimits, formatReading, formatSpread } from '../../shared/measure/format-reading.js';
import type { Verdict } from '../../shared/verdict.js';
import type { Style } from '../output.js';
import { padRight, shown, wrap } from './columns.js';
import { repairText } from './repair-text.js';
import { verdictText } from './verdict.js';
import { dayText, timeText, unitLabel } from './words.js';

const WHEN = 20;
const VERDICT = 17;

function wordsOf(event: UnitEvent): { what: string; verdict?: Verdict } {
  switch (event.kind) {
    case 'intake':
      return { what: 'taken in' };
    case 'returned':
      return { what: `came back: ${event.complaint}` };
    case 'sold':
      return { what: 'sold' };
    case 'inspection':
      return {
        what: `${event.inspection.title}${event.inspection.note === undefined ? '' : `: ${event.inspection.note}`}`,
        verdict: event.inspection.verdict,
      };
    case 'reading': {
      const { judgement, resolution, title } = event.reading;
      const { value, unit, low, high, expandedUncertainty, verdict } = judgement;
      return {
        what: `${title} ${formatReading(value, resolution, unit)} ${formatSpread(expandedUncertainty, resolution)}, ${formatLimits(low, high, '', resolution)}`,
        verdict,
      };
    }
    case 'capture': {
      const codes = [...new Set(event.capture.answer.codes.map(({ code }) => code))];
      return { what: `lamps, ${Math.round(event.capture.answer.durationS)} s: ${codes.join(', ') || 'no code'}` };
    }
    case 'run began':
      return { what: `${event.script} began` };
    case 'run ended':
      return { what: `${event.script} ended`, verdict: event.verdict };
    case 'repair':
      return { what: `mended: ${repairText(event.repair)}` };
    case 'part removed':
      return { what: `part taken out: ${event.part}, for ${unitLabel(event.toUnit)}` };
    case 'calibration':
      return { what: `calibration run: ${event.calibration.reason}`, verdict: event.calibration.verdict };
    case 'codes cleared':
      return { what: 'stored codes cleared' };
    case 'note':
      return { what: event.text };
    case 'override':
      return { what: `the dead-test gate was opened: ${event.reason}` };
    case 'sign-off':
      return { what: `signed off, tag ${event.tag}` };
    case 'tag withdrawn':
      return { what: `tag ${event.tag} withdrawn: ${event.reason}` };
  }
}

/** One thing that happened to a unit: when, its verdict (all in one column), what and by whom. */
export function eventLine(event: UnitEvent, style: Style): string[] {
  const { what, verdict } = wordsOf(event);
  const sign = verdict === undefined ? '' : verdictText(verdict, style);
  const by = `${event.by.name}${event.simulated ? ', simulated' : ''}`;
  const indent = WHEN + VERDICT;
  const [first = '', ...rest] = wrap(`${what.replace(/\.$/, '')}, ${by}`, Math.max(30, style.columns - indent - 1));
  const head = `${padRight(`${dayText(event.at)}  ${timeText(event.at)}`, WHEN)}${padRight(sign, VERDICT)}`;
  return [`${head}${first}`, ...rest.map((line) => `${' '.repeat(indent)}${line}`)].map((line) => shown(line, style));
}
