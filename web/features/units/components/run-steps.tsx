import { Link } from 'react-router-dom';
import type { UnitEvent } from '../../../../shared/history/events.js';
import { clock } from '../../../../shared/script/judge-watch.js';
import { readingLine } from '../../../components/reading-line.js';
import { StepsTable, type StepLine } from '../../../components/steps-table.js';
import { paths } from '../../../paths.js';

function lineOf(event: UnitEvent): StepLine | undefined {
  const { id } = event;
  switch (event.kind) {
    case 'inspection':
      return {
        id,
        kind: 'inspect',
        title: event.inspection.title,
        verdict: event.inspection.verdict,
        note: event.inspection.note && <p className="px-3 py-1 text-[16px]">{event.inspection.note}</p>,
      };
    case 'reading':
      return readingLine(id, event.reading);
    case 'capture':
      return {
        id,
        kind: 'capture',
        title: `Lamps, ${event.capture.answer.durationS.toFixed(1)} s`,
        value: <Link to={paths.capture(event.capture.captureId)}>Strip chart</Link>,
        said: 'kept',
      };
    case 'calibration':
      return {
        id,
        kind: 'watch',
        title: `Calibration run: ${event.calibration.reason}`,
        value: <span className="num">{clock(event.calibration.seconds)}</span>,
        verdict: event.calibration.verdict,
      };
    case 'repair':
      return {
        id,
        kind: 'repair',
        title: event.repair.part,
        value: <span className="num">{event.repair.minutes} min</span>,
        said: 'recorded',
      };
    case 'codes cleared':
      return { id, kind: 'clear', title: 'Stored codes cleared', said: 'done' };
    case 'note':
      return { id, kind: 'note', title: event.text, said: 'noted' };
    default:
      return undefined;
  }
}

/** What a bench run left in the unit's history, a line a step; the whole log is a page of its own. */
export function RunSteps({ events }: { events: readonly UnitEvent[] }) {
  return <StepsTable caption="What the run recorded" lines={events.map(lineOf).filter((line) => line !== undefined)} />;
}
