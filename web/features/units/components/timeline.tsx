import './timeline.css';
import { useState, type ReactNode } from 'react';
import { Link } from 'react-router-dom';
import type { UnitPage } from '../../../../shared/api/units.js';
import type { RepairBody, UnitEvent } from '../../../../shared/history/events.js';
import { formatLimits } from '../../../../shared/measure/format-reading.js';
import { clock } from '../../../../shared/script/judge-watch.js';
import { CaptureSummary } from '../../../components/capture-summary.js';
import { ReadingNote, ReadingValue } from '../../../components/reading-note.js';
import { VerdictWord } from '../../../components/verdict.js';
import { formatShortDay, formatDuration, formatMoney, formatTime, plural, unitNumber } from '../../../lib/format.js';
import { paths } from '../../../paths.js';
import { RunSteps } from './run-steps.js';
import { timelineOf, type TimelineItem } from './timeline-items.js';

interface Told {
  title: ReactNode;
  meta?: ReactNode;
  right?: ReactNode;
  body?: ReactNode;
}

function partFrom(repair: RepairBody): string {
  if (repair.partSource.kind === 'used') return `Used part from No. ${unitNumber(repair.partSource.fromUnit)}. `;
  return repair.partSource.kind === 'new' ? 'New part. ' : '';
}

function tell(event: UnitEvent, { faces, unit }: UnitPage, currency: string): Told {
  switch (event.kind) {
    case 'intake':
      return { title: 'Taken in', body: <p>“{event.complaint}”</p> };
    case 'returned':
      return { title: 'Came back', body: <p>“{event.complaint}”</p> };
    case 'sold':
      return { title: 'Sale' };
    case 'inspection':
      return {
        title: event.inspection.title,
        right: <VerdictWord verdict={event.inspection.verdict} />,
        ...(event.inspection.note ? { body: <p>{event.inspection.note}</p> } : {}),
      };
    case 'reading': {
      const { judgement, resolution, title } = event.reading;
      return {
        title,
        right: <VerdictWord verdict={judgement.verdict} />,
        body: (
          <>
            <p>
              <ReadingValue reading={event.reading} />,{' '}
              <span className="num">{formatLimits(judgement.low, judgement.high, judgement.unit, resolution)}</span>
              {event.reading.source === 'typed' ? ', typed in' : ''}
            </p>
            <ReadingNote reading={event.reading} />
          </>
        ),
      };
    }
    case 'capture':
      return {
        title: `Capture, ${event.capture.answer.durationS.toFixed(0)} s`,
        meta: event.capture.source,
        right: (
          <Link className="tap" to={paths.capture(event.capture.captureId)}>
            Strip chart
          </Link>
        ),
        body: <CaptureSummary answer={event.capture.answer} faces={faces} />,
      };
    case 'repair':
      return {
        title: event.repair.partSource.kind === 'none' ? event.repair.part : `${event.repair.part} replaced`,
        meta: `${event.repair.minutes} min`,
        right: <span className="num">{formatMoney(event.repair.costMinor, currency)}</span>,
        body: (
          <p>
            {partFrom(event.repair)}
            {event.repair.note ? `${event.repair.note} ` : ''}What was measured before it no longer counts for readiness.
          </p>
        ),
      };
    case 'part removed':
      return {
        title: `${event.part} taken out`,
        body: <p>It went into No. {unitNumber(event.toUnit)}. What was measured before it no longer counts for readiness.</p>,
      };
    case 'calibration':
      return {
        title: 'Calibration run',
        meta: clock(event.calibration.seconds),
        right: <VerdictWord verdict={event.calibration.verdict} />,
        body: <p>{event.calibration.reason}</p>,
      };
    case 'codes cleared':
      return { title: 'Stored codes cleared' };
    case 'note':
      return { title: 'Note', body: <p>{event.text}</p> };
    case 'override':
      return { title: 'The dead-test gate was opened by a lead', body: <p>“{event.reason}”</p> };
    case 'sign-off':
      return {
        title: 'Sign-off',
        meta: event.fourEyes ? '' : 'four eyes switched off',
        right: <span className="num">{plural(event.rulesMet, 'rule')} met</span>,
        body: (
          <p>
            <Link to={paths.unitTag(unit.number)}>Tag {event.tag}</Link>
          </p>
        ),
      };
    case 'tag withdrawn':
      return { title: `Tag ${event.tag} withdrawn`, body: <p>{event.reason}</p> };
    case 'run began':
    case 'run ended':
      return { title: `Bench run ${event.script}` };
  }
}

function EventItem({ event, page, currency }: { event: UnitEvent; page: UnitPage; currency: string }) {
  const { title, meta, right, body } = tell(event, page, currency);
  return (
    <article className="happening">
      <time dateTime={event.at}>{formatTime(event.at)}</time>
      <h4>
        {title}{' '}
        <span>
          {[event.by.name, meta, event.simulated ? 'simulated' : ''].filter(Boolean).map((part, index) => (
            <span key={index}>
              {index > 0 && ', '}
              {part}
            </span>
          ))}
        </span>
      </h4>
      {right ?? <span />}
      {body !== undefined && <div className="happening-body">{body}</div>}
    </article>
  );
}

function RunItem({ item, page }: { item: Extract<TimelineItem, { kind: 'run' }>; page: UnitPage }) {
  const began = item.events[0];
  const { run } = item;
  const captures = item.events.filter((event) => event.kind === 'capture');
  const told = [
    run?.by.name ?? began?.by.name,
    run && formatDuration(run.startedAt, run.endedAt),
    run && plural(run.steps, 'step'),
    began?.simulated ? 'simulated rig' : '',
  ];
  return (
    <article className="happening">
      <time dateTime={item.at}>{formatTime(item.at)}</time>
      <h4>
        <Link to={paths.run(item.id)}>Bench run {run?.script ?? ''}</Link> <span>{told.filter(Boolean).join(', ')}</span>
      </h4>
      {run ? <VerdictWord verdict={run.verdict} /> : <span />}
      <div className="happening-body">
        <RunSteps events={item.events} />
        {captures.map((event) => (
          <div key={event.id} className="mt-3">
            <CaptureSummary answer={event.capture.answer} faces={page.faces} />
          </div>
        ))}
      </div>
    </article>
  );
}

/**
 * What happened while the page was open waits until somebody asks for it, so that what is being read stays where it is.
 * One's own doing is shown at once: it was just asked for.
 */
function useShown(page: UnitPage, userId: string): { shown: UnitPage; waiting: number; showAll: () => void } {
  const [count, setCount] = useState(page.events.length);
  const fresh = page.events.slice(count);
  const own = fresh.every((event) => event.by.id === userId);
  const shown = own ? page : { ...page, events: page.events.slice(0, count) };
  return { shown, waiting: own ? 0 : fresh.length, showAll: () => setCount(page.events.length) };
}

/** Everything that ever happened to a unit, newest first, along the rail of its stages. */
export function Timeline({
  page,
  userId,
  currency,
  demo,
  nowMs,
}: {
  page: UnitPage;
  userId: string;
  currency: string;
  demo: boolean;
  nowMs: number;
}) {
  const { shown, waiting, showAll } = useShown(page, userId);
  return (
    <div>
      <div aria-live="polite">
        {waiting > 0 && (
          <button type="button" className="button button-plain my-3" onClick={showAll}>
            {waiting} new
          </button>
        )}
      </div>
      {timelineOf(shown, demo).map((group) => (
        <section key={`${group.stage} ${group.items[0]?.id}`} className="stage-group">
          <h3>
            {group.stage}
            <small>{formatShortDay(group.at, nowMs)}</small>
          </h3>
          <div className="min-w-0">
            {group.items.map((item) =>
              item.kind === 'run' ? (
                <RunItem key={item.id} item={item} page={shown} />
              ) : (
                <EventItem key={item.id} event={item.event} page={shown} currency={currency} />
              ),
            )}
          </div>
        </section>
      ))}
    </div>
  );
}
