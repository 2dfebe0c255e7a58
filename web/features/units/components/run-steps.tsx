import type { ReactNode } from 'react';
import { Link } from 'react-router-dom';
import type { UnitEvent } from '../../../../shared/history/events.js';
import { formatLimits } from '../../../../shared/measure/format-reading.js';
import { clock } from '../../../../shared/script/judge-watch.js';
import type { Verdict } from '../../../../shared/verdict.js';
import { ReadingNote, ReadingValue } from '../../../components/reading-note.js';
import { VerdictWord } from '../../../components/verdict.js';
import { paths } from '../../../paths.js';

interface StepLine {
  kind: string;
  title: ReactNode;
  value?: ReactNode;
  verdict?: Verdict;
  said?: string;
  note?: ReactNode;
}

function lineOf(event: UnitEvent): StepLine | undefined {
  switch (event.kind) {
    case 'inspection':
      return { kind: 'inspect', title: event.inspection.title, verdict: event.inspection.verdict, ...(event.inspection.note ? { note: <p className="px-3 py-1 text-[16px]">{event.inspection.note}</p> } : {}) };
    case 'reading': {
      const { title, judgement, resolution } = event.reading;
      return {
        kind: 'measure',
        title: (
          <>
            {title}, <span className="num">{formatLimits(judgement.low, judgement.high, judgement.unit, resolution)}</span>
          </>
        ),
        value: <ReadingValue reading={event.reading} />,
        verdict: judgement.verdict,
        ...(judgement.verdict === 'inconclusive' ? { note: <ReadingNote reading={event.reading} /> } : {}),
      };
    }
    case 'capture':
      return { kind: 'capture', title: 'Lamps', value: <span className="num">{event.capture.answer.durationS.toFixed(1)} s</span>, said: 'kept' };
    case 'calibration':
      return { kind: 'watch', title: `Calibration run: ${event.calibration.reason}`, value: <span className="num">{clock(event.calibration.seconds)}</span>, verdict: event.calibration.verdict };
    case 'repair':
      return { kind: 'repair', title: event.repair.part, value: <span className="num">{event.repair.minutes} min</span>, said: 'recorded' };
    case 'codes cleared':
      return { kind: 'clear', title: 'Stored codes cleared', said: 'done' };
    case 'note':
      return { kind: 'note', title: event.text, said: 'noted' };
    default:
      return undefined;
  }
}

/** What a bench run left in the unit's history, a line a step; the whole log is a page of its own. */
export function RunSteps({ events }: { events: readonly UnitEvent[] }) {
  const lines = events.flatMap((event) => {
    const line = lineOf(event);
    return line ? [{ id: event.id, event, line }] : [];
  });
  return (
    <table className="steps-table">
      <caption className="sr-only">Steps of the run</caption>
      <thead className="sr-only">
        <tr>
          {['step', 'kind', 'what', 'reading', 'verdict'].map((head) => (
            <th key={head} scope="col">
              {head}
            </th>
          ))}
        </tr>
      </thead>
      <tbody>
        {lines.map(({ id, event, line }, index) => [
          <tr key={id} className={line.verdict === 'inconclusive' ? 'is-open' : ''}>
            <td>{index + 1}</td>
            <td>{line.kind}</td>
            <td>{line.title}</td>
            <td>{event.kind === 'capture' ? <Link to={paths.capture(event.capture.captureId)}>Strip chart</Link> : line.value}</td>
            <td>{line.verdict === undefined ? <span className="pl-[25px] text-ink2">{line.said}</span> : <VerdictWord verdict={line.verdict} />}</td>
          </tr>,
          line.note !== undefined && (
            <tr key={`${id} note`} className="steps-note">
              <td colSpan={5}>{line.note}</td>
            </tr>
          ),
        ])}
      </tbody>
    </table>
  );
}
