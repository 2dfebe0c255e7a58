import './live.css';
import { useEffect, useState } from 'react';
import { SmallLampFace } from '../../../components/lamp-face.js';
import { VerdictWord } from '../../../components/verdict.js';
import { formatTime } from '../../../lib/format.js';
import { isSilent, type LiveCapture, type LiveWork } from '../live-state.js';
import { LiveLanes } from './live-lanes.js';

const LOOK_AT_CLOCK_MS = 10_000;

/** So that silence is noticed, too. */
export function useNowMs(): number {
  const [nowMs, setNowMs] = useState(() => Date.now());
  useEffect(() => {
    const timer = setInterval(() => setNowMs(Date.now()), LOOK_AT_CLOCK_MS);
    return () => clearInterval(timer);
  }, []);
  return nowMs;
}

const ENDED_WORDS = { ended: 'Ended', parked: 'Parked', stopped: 'Stopped', failed: 'Broken off' } as const;

/** The steps as ticks: done, the one that goes on, those still to come. The words beside it say the same. */
function StepTicks({ work }: { work: LiveWork }) {
  return (
    <span className="live-ticks" aria-hidden="true">
      {work.began.steps.map((step, index) => (
        <i key={step.id} className={work.results.has(index) ? 'done' : work.step?.index === index ? 'now' : ''} />
      ))}
    </span>
  );
}

function CodeSoFar({ capture }: { capture: LiveCapture }) {
  const { code } = capture;
  if (code === undefined || (code.code === undefined && code.reason === undefined && code.shows !== 'ready')) return null;
  return (
    <div className="live-code">
      {code.code !== undefined && (
        <>
          <b className="num text-[28px] tracking-[-0.03em]">{code.code}</b>
          {code.face && <SmallLampFace face={code.face} />}
          <span>
            {code.title}{' '}
            <span className="lab">
              {[
                code.repeats === undefined ? '' : `${code.repeats} times`,
                code.confidence === undefined ? '' : `confidence ${code.confidence.toFixed(4)}`,
              ]
                .filter(Boolean)
                .join(', ')}
            </span>
          </span>
        </>
      )}
      {code.reason !== undefined && <span>Unreadable so far: {code.reason}</span>}
      {code.shows === 'ready' && <span className="lab">ready blink now</span>}
    </div>
  );
}

/** What is said in words of a step and its verdict; this alone is read out, the lamps are not. */
function StepAndVerdict({ work }: { work: LiveWork }) {
  const { steps, what } = work.began;
  const current = work.step && steps[work.step.index];
  const last = work.lastResult === undefined ? undefined : work.results.get(work.lastResult);
  const lastStep = work.lastResult === undefined ? undefined : steps[work.lastResult];
  return (
    <div aria-live="polite" className="min-w-0">
      <p className="font-bold">
        {work.ended
          ? `${ENDED_WORDS[work.ended.how]} ${formatTime(work.ended.at)}`
          : current
            ? `${what === 'run' ? `Step ${(work.step?.index ?? 0) + 1} of ${steps.length}: ` : ''}${current.title}`
            : `${steps.length} ${steps.length === 1 ? 'step' : 'steps'}`}
        {work.ended?.verdict !== undefined && (
          <>
            {' '}
            <VerdictWord verdict={work.ended.verdict} />
          </>
        )}
      </p>
      {last && lastStep && what !== 'capture' && (
        <p className="live-last">
          <span className="min-w-0">
            {lastStep.title}
            {last.told !== '' && <span className="text-ink2">: {last.told}</span>}
          </span>
          {last.verdict !== undefined && <VerdictWord verdict={last.verdict} />}
        </p>
      )}
    </div>
  );
}

/** Which work it is, in words. */
export const whatGoesOn = ({ began: { what, title } }: LiveWork): string =>
  what === 'run' ? `Bench run ${title}` : what === 'capture' ? 'Capture' : `Reading: ${title}`;

/** What goes on at a bench, as it is told: what, by whom, since when, the step, the last verdict, the lamps, the code so far. */
export function LiveWorkView({ work }: { work: LiveWork }) {
  const nowMs = useNowMs();
  const { began, capture } = work;
  return (
    <div className="live-work">
      <p>
        {whatGoesOn(work)}{' '}
        <span className="lab">
          {work.by.name}, since <time dateTime={began.at}>{formatTime(began.at)}</time>
          {began.rig.simulated ? ', simulated rig' : ''}
        </span>
      </p>
      {began.what === 'run' && <StepTicks work={work} />}
      <StepAndVerdict work={work} />
      {isSilent(work, nowMs) && (
        <p className="text-ink2">Not heard of since {formatTime(work.heardAt)}: the bench may be without its network.</p>
      )}
      {capture && !work.ended && (
        <>
          <LiveLanes key={capture.began.captureId} capture={capture} />
          <CodeSoFar capture={capture} />
        </>
      )}
    </div>
  );
}
