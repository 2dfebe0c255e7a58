import type { DecodeAnswer, DecodeView } from '../../../../shared/decode/answer.js';
import type { LampFace } from '../../../../shared/lamps/face.js';
import type { Sheet } from '../../../../shared/sheet/schema.js';
import { LampFaceFigure } from '../../../components/lamp-face.js';
import { oneIn, seenOutside } from './capture-words.js';

/** Each code of a capture: its face with the sums, how often and how surely it was seen, and what the sheet says to it. */
export function CaptureCodes({
  answer,
  view,
  sheet,
  faces,
}: {
  answer: DecodeAnswer;
  view: DecodeView;
  sheet: Sheet;
  faces: Readonly<Record<string, LampFace>>;
}) {
  const stretches = answer.segments.filter((segment) => segment.kind === 'code');
  const unreadable = answer.segments.filter((segment) => segment.kind === 'unreadable');
  return (
    <div className="grid gap-6">
      <div className="flex flex-wrap gap-x-11 gap-y-6">
        {stretches.map((stretch) => {
          const fault = sheet.faults.find((one) => one.code === stretch.code);
          const face = faces[stretch.code];
          return (
            <article key={stretch.fromS} className="max-w-[484px] min-w-0">
              <header className="mb-2 flex flex-wrap items-baseline gap-x-3">
                <h2 className="font-mono text-[32px] leading-none font-bold tracking-tight">{stretch.code}</h2>
                <p className="font-bold">{fault?.title ?? 'The sheet has no meaning for it.'}</p>
              </header>
              {face && <LampFaceFigure face={face} seen={seenOutside(view, stretch)} />}
              <p className="mt-2">
                {stretch.repeats !== undefined && (
                  <>
                    Seen <b>{stretch.repeats} times</b>,{' '}
                  </>
                )}
                confidence <b className="num">{stretch.confidence.toFixed(4)}</b>: wrong{' '}
                <b className="whitespace-nowrap">{oneIn(stretch.confidence)}</b>.
              </p>
              {fault?.first !== undefined && <p className="text-[16px] text-ink2">The sheet: {fault.first}</p>}
              {fault?.suspects !== undefined && <p className="text-[16px] text-ink2">Suspected parts: {fault.suspects.join(', ')}.</p>}
            </article>
          );
        })}
      </div>
      {stretches.length === 0 && unreadable.length === 0 && <p>No code was shown.</p>}
      {unreadable.map((stretch) => (
        <article key={stretch.fromS} className="flex items-stretch gap-4">
          <span className="hatched w-14 flex-none" />
          <div>
            <h2>
              Unreadable,{' '}
              <span className="num">
                {stretch.fromS.toFixed(1)} to {stretch.toS.toFixed(1)} s
              </span>
            </h2>
            <p>{stretch.reason}</p>
            {stretch.candidates.length > 0 && (
              <p className="text-ink2">
                Likeliest, but not stated:{' '}
                <span className="num whitespace-normal!">
                  {stretch.candidates.map(({ code, confidence }) => `${code} ${confidence.toFixed(4)}`).join(', ')}
                </span>
              </p>
            )}
          </div>
        </article>
      ))}
    </div>
  );
}
