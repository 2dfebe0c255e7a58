import type { DecodeAnswer } from '../../shared/decode/answer.js';
import type { LampFace } from '../../shared/lamps/face.js';
import { LampFaceFigure } from './lamp-face.js';

/** What a capture showed, without its chart: a face for each code, and in words what else there was. */
export function CaptureSummary({ answer, faces }: { answer: DecodeAnswer; faces: Readonly<Record<string, LampFace>> }) {
  const codes = [...new Map(answer.codes.map((code) => [code.code, code])).values()];
  const unreadable = answer.segments.filter((segment) => segment.kind === 'unreadable');
  const ready = answer.segments.some((segment) => segment.kind === 'ready');
  return (
    <div className="grid gap-2.5">
      {codes.length > 0 && (
        <div className="flex flex-wrap gap-x-7 gap-y-3">
          {codes.map(({ code, repeats }) => {
            const face = faces[code];
            return (
              <figure key={code} className="min-w-0 max-w-full">
                <figcaption className="mb-1 text-[16px]">
                  <b className="num text-[19px]!">{code}</b> {face?.title}
                  {repeats !== undefined && <span className="lab ml-2">seen {repeats} times</span>}
                </figcaption>
                {face && <LampFaceFigure face={face} />}
              </figure>
            );
          })}
        </div>
      )}
      {codes.length === 0 && unreadable.length === 0 && <p>{ready ? 'Ready blink, and no code.' : 'Neither a ready blink nor a code.'}</p>}
      {answer.deadLamps.length > 0 && <p>Not lit in the ready blink: {answer.deadLamps.join(', ')}. Perhaps burnt out.</p>}
      {unreadable.map((segment) => (
        <p key={segment.fromS} className="flex items-stretch gap-3">
          <span className="hatched w-9 flex-none" />
          <span>
            <b>unreadable</b>{' '}
            <span className="num">
              {segment.fromS.toFixed(1)} to {segment.toS.toFixed(1)} s
            </span>
            : {segment.reason}
          </span>
        </p>
      ))}
    </div>
  );
}
