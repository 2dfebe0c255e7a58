import type { ReadingBody } from '../../shared/history/events.js';
import { formatLimits } from '../../shared/measure/format-reading.js';
import { ReadingNote, ReadingValue } from './reading-note.js';
import type { StepLine } from './steps-table.js';

/** A reading as a line of a steps table: title and limits, value and spread, verdict, and why where it is too close. */
export function readingLine(id: string, reading: ReadingBody): StepLine {
  const { title, judgement, resolution } = reading;
  return {
    id,
    kind: 'measure',
    title: (
      <>
        {title}, <span className="num">{formatLimits(judgement.low, judgement.high, judgement.unit, resolution)}</span>
      </>
    ),
    value: <ReadingValue reading={reading} />,
    verdict: judgement.verdict,
    note: judgement.verdict === 'inconclusive' ? <ReadingNote reading={reading} /> : undefined,
  };
}
