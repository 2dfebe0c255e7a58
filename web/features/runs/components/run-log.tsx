import { Link } from 'react-router-dom';
import type { RunPage } from '../../../../shared/api/runs.js';
import { clock } from '../../../../shared/script/judge-watch.js';
import type { StepResult } from '../../../../shared/script/run-log.js';
import { CaptureSummary } from '../../../components/capture-summary.js';
import { readingLine } from '../../../components/reading-line.js';
import { StepsTable, type StepLine } from '../../../components/steps-table.js';
import { formatTime, unitNumber } from '../../../lib/format.js';
import { paths } from '../../../paths.js';

function expectedInWords(expected: string): string {
  if (expected === 'none') return 'no code expected';
  return expected === 'any' ? 'any code expected' : `${expected} expected`;
}

const Note = ({ text }: { text: string }) => <p className="px-3 py-1 text-[16px] text-ink2">{text}</p>;

function CaptureLink({ id }: { id: string }) {
  return <Link to={paths.capture(id)}>Strip chart</Link>;
}

function lineOf(step: StepResult, page: RunPage): StepLine {
  const base = { id: step.stepId, kind: step.kind, title: step.title };
  switch (step.kind) {
    case 'caution':
      return {
        ...base,
        said: step.answer === 'yes' ? 'confirmed' : undefined,
        verdict: step.answer === 'no' ? 'not done' : undefined,
        note: step.answer === 'no' ? <Note text="Answered no: went to the safe state." /> : undefined,
      };
    case 'instruct':
      return { ...base, said: step.answer === 'done' ? 'done' : undefined, verdict: step.answer === 'done' ? undefined : 'not done' };
    case 'inspect':
      return {
        ...base,
        verdict: step.inspection.verdict,
        note: step.inspection.note === undefined ? undefined : <Note text={step.inspection.note} />,
      };
    case 'measure': {
      const instrument =
        step.reading.source === 'typed'
          ? 'typed in from a handheld'
          : (step.reading.instrument?.identification ?? step.reading.instrument?.id);
      const line = readingLine(step.stepId, step.reading);
      return {
        ...line,
        title: (
          <>
            {line.title}{' '}
            {instrument !== undefined && (
              <span className="lab">
                {instrument}, {step.reading.accuracy}
              </span>
            )}
          </>
        ),
      };
    }
    case 'capture': {
      const answer = page.answers[step.captureId];
      return {
        ...base,
        value: <CaptureLink id={step.captureId} />,
        said: step.fromFile ? 'from a file' : 'kept',
        note: answer && (
          <div className="px-3 py-2">
            <CaptureSummary answer={answer} faces={page.faces} />
          </div>
        ),
      };
    }
    case 'cut':
      return { ...base, value: <CaptureLink id={step.captureId} />, said: 'broken off; what came is kept' };
    case 'expect':
      return {
        ...base,
        title: `${step.title}: ${expectedInWords(step.expected)}, ${step.seen}`,
        value: <CaptureLink id={step.captureId} />,
        verdict: step.verdict,
      };
    case 'watch':
      return {
        ...base,
        title: `${step.title}: ${step.watched.reason}`,
        value: (
          <>
            <span className="num">{clock(step.watched.seconds)}</span> <CaptureLink id={step.captureId} />
          </>
        ),
        verdict: step.watched.verdict,
      };
    case 'repair': {
      const { part, partSource, minutes, note } = step.repair;
      const from =
        partSource.kind === 'used' ? `, used, from No. ${unitNumber(partSource.fromUnit)}` : partSource.kind === 'new' ? ', new part' : '';
      return {
        ...base,
        title: `${part}${from}`,
        value: <span className="num">{minutes} min</span>,
        said: 'recorded',
        note: note === undefined ? undefined : <Note text={note} />,
      };
    }
    case 'clear':
      return { ...base, said: 'done' };
    case 'note':
      return { ...base, title: `${step.title}: ${step.text}`, said: 'noted' };
    case 'skipped':
      return { ...base, kind: step.stepKind, verdict: 'not done', note: <Note text={`Skipped: ${step.reason}`} /> };
  }
}

/** A bench log, step for step, as the bench recorded it and the server judged it again. */
export function RunLogTable({ page }: { page: RunPage }) {
  return (
    <StepsTable
      caption={`Steps of ${page.script.name}, ${formatTime(page.startedAt)} to ${formatTime(page.endedAt)}`}
      lines={page.steps.map((step) => lineOf(step, page))}
    />
  );
}
