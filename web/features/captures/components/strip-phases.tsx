import type { DecodeAnswer, DecodeView, Segment } from '../../../../shared/decode/answer.js';
import type { Sheet } from '../../../../shared/sheet/schema.js';
import type { Strip } from './strip-geometry.js';

const PHASE_HEIGHT = 28;
/** A box narrower than this has no room for its word. */
const ROOM_FOR_WORD_PX = 22;
const ROOM_FOR_CODE_PX = 40;

function SegmentBracket({ segment, strip, y }: { segment: Segment; strip: Strip; y: number }) {
  const from = strip.xOf(segment.fromS);
  const to = strip.xOf(segment.toS);
  const middle = (from + to) / 2;
  const bracket = `M${from + 1} ${y - 6}V${y}H${to - 1}V${y - 6}`;
  if (segment.kind === 'dark') return null;
  if (segment.kind === 'unreadable') {
    return (
      <>
        <rect className="hatch" x={from} y={y - 40} width={Math.max(0, to - from)} height={PHASE_HEIGHT} />
        <path className="bracket bracket-quiet" d={bracket} />
        {to - from > 90 && (
          <text className="quiet middle" x={middle} y={y + 19}>
            unreadable
          </text>
        )}
      </>
    );
  }
  if (segment.kind === 'ready') {
    return (
      <>
        <rect className="phase" x={from} y={y - 40} width={to - from} height={PHASE_HEIGHT} />
        {to - from > 96 && (
          <>
            <text className="phase-word" x={middle} y={y - 21}>
              ready blink
            </text>
            <text className="quiet middle" x={middle} y={y + 19}>
              service mode on
            </text>
          </>
        )}
        <path className="bracket bracket-quiet" d={bracket} />
      </>
    );
  }
  return (
    <>
      <path className="bracket" d={bracket} />
      {to - from > ROOM_FOR_CODE_PX && (
        <text className="code-word" x={middle} y={y + 19}>
          {segment.code}
          {segment.repeats !== undefined && to - from > 130 && `, ${segment.repeats} times`}
        </text>
      )}
    </>
  );
}

/** Under the paper: the decoded phases as boxes, and a bracket with the code over each stretch. */
export function StripPhases({ strip, answer, view, sheet }: { strip: Strip; answer: DecodeAnswer; view: DecodeView; sheet: Sheet }) {
  const y = strip.paperBottom + 22;
  const letters = sheet.coding.kind === 'weighted-phases' ? sheet.coding.letters : undefined;
  return (
    <g>
      {view.phases.map((phase) => {
        const from = strip.xOf(phase.fromS);
        const width = Math.max(0, strip.xOf(phase.toS) - from);
        const told = phase.whole && phase.digit !== null;
        return (
          <g key={phase.fromS}>
            <rect
              className={`phase ${told ? (phase.selectorLit ? 'phase-selected' : '') : 'phase-cut'}`}
              x={from}
              y={y}
              width={width}
              height={PHASE_HEIGHT}
            />
            {told && width >= ROOM_FOR_WORD_PX && (
              <text className={`phase-word ${phase.selectorLit ? 'strong' : ''}`} x={from + width / 2} y={y + 19}>
                {letters?.[phase.selectorLit ? 'on' : 'off']}
                {phase.digit}
              </text>
            )}
          </g>
        );
      })}
      {answer.segments.map((segment) => (
        <SegmentBracket key={`${segment.kind} ${segment.fromS}`} segment={segment} strip={strip} y={y + 40} />
      ))}
    </g>
  );
}
