import type { Judgement } from '../../shared/measure/judge.js';
import { formatLimits, formatReading } from '../../shared/measure/format-reading.js';

const WIDTH = 460;
const HEIGHT = 72;
const AXIS_Y = 30;
/** How far the scale goes beyond its limits (the look's rules): a share of the span, or a multiple of the one limit. */
const BEYOND_SPAN = 0.6;
const AT_MOST_TIMES = 1.5;
const AT_LEAST_TIMES = 2.6;
const LEAST_GUARD_PX = 4;

function scaleOf(low: number | undefined, high: number | undefined): { from: number; to: number } {
  if (low !== undefined && high !== undefined) {
    const span = high - low || Math.abs(low) || 1;
    return { from: low - BEYOND_SPAN * span, to: high + BEYOND_SPAN * span };
  }
  if (high !== undefined) return { from: Math.min(0, AT_MOST_TIMES * high), to: Math.max(0, AT_MOST_TIMES * high) || 1 };
  return { from: Math.min(0, AT_LEAST_TIMES * (low ?? 0)), to: Math.max(0, AT_LEAST_TIMES * (low ?? 1)) || 1 };
}

export interface ScaleReading {
  judgement: Judgement;
  resolution: number;
}

const KIND = { pass: 'is-pass', fail: 'is-fail', inconclusive: 'is-inconclusive' } as const;

function Wedge({ reading, place, xOf }: { reading: ScaleReading; place: 'before' | 'after'; xOf: (value: number) => number }) {
  const { judgement } = reading;
  const x = xOf(judgement.value);
  const y = place === 'before' ? AXIS_Y - 3 : AXIS_Y + 3;
  const offLeft = x < 0;
  if (offLeft || x > WIDTH) {
    const middle = place === 'before' ? AXIS_Y - 13 : AXIS_Y + 13;
    return (
      <path
        className={`${place} ${KIND[judgement.verdict]}`}
        d={offLeft ? `M2 ${middle}l13 -8v16z` : `M${WIDTH - 2} ${middle}l-13 -8v16z`}
      />
    );
  }
  const from = Math.max(0, xOf(judgement.value - judgement.expandedUncertainty));
  const to = Math.min(WIDTH, xOf(judgement.value + judgement.expandedUncertainty));
  return (
    <g className={KIND[judgement.verdict]}>
      <path className="spread" d={`M${from} ${y - 5}v10M${to} ${y - 5}v10M${from} ${y}H${to}`} />
      <path className={place} d={place === 'before' ? `M${x} ${y}l-8 -19h16z` : `M${x} ${y}l-8 19h16z`} />
    </g>
  );
}

/** A check's limits as a scale, with the reading before the repair hanging from above and the one after standing below. */
export function MeterScale({
  title,
  before,
  after,
}: {
  title: string;
  before?: ScaleReading | undefined;
  after?: ScaleReading | undefined;
}) {
  const judged = after ?? before;
  if (!judged) return null;
  const { low, high, unit, guardBand } = judged.judgement;
  const { from, to } = scaleOf(low, high);
  const xOf = (value: number): number => ((value - from) / (to - from)) * WIDTH;
  const bandFrom = low === undefined ? 0 : xOf(low);
  const bandTo = high === undefined ? WIDTH : xOf(high);
  const guardPx = Math.max(LEAST_GUARD_PX, xOf(from + 2 * guardBand));
  const limits = [low, high].filter((limit) => limit !== undefined);
  const said = (
    [
      ['before', before],
      ['after', after],
    ] as const
  ).flatMap(([place, reading]) =>
    reading ? [`${place} ${formatReading(reading.judgement.value, reading.resolution, unit)}, ${reading.judgement.verdict}`] : [],
  );
  return (
    <svg
      className="meter-scale"
      viewBox={`0 0 ${WIDTH} ${HEIGHT}`}
      role="img"
      aria-label={`${title}, ${formatLimits(low, high, unit, judged.resolution)}: ${said.join('; ')}`}
    >
      <path className="axis" d={`M0 ${AXIS_Y}H${WIDTH}`} />
      <rect className="inside" x={bandFrom} y={AXIS_Y - 6} width={bandTo - bandFrom} height="12" />
      {limits.map((limit) => (
        <g key={limit}>
          <rect className="guard" x={xOf(limit) - guardPx / 2} y={AXIS_Y - 10} width={guardPx} height="20" />
          <path className="limit" d={`M${xOf(limit)} ${AXIS_Y - 14}v28`} />
          <text x={xOf(limit)} y="68">
            {formatLimits(undefined, limit, '', judged.resolution).replace('at most ', '')}
          </text>
        </g>
      ))}
      {before && <Wedge reading={before} place="before" xOf={xOf} />}
      {after && <Wedge reading={after} place="after" xOf={xOf} />}
    </svg>
  );
}
