import './strip-chart.css';
import { useMemo } from 'react';
import type { DecodeAnswer, DecodeView, Segment } from '../../../../shared/decode/answer.js';
import type { Capture } from '../../../../shared/lamps/capture.js';
import type { Sheet } from '../../../../shared/sheet/schema.js';
import { LEVELS_WIDTH, NAMES_WIDTH, stripOf, tracePath, WEAK_BELOW, type Strip } from './strip-geometry.js';
import { StripPhases } from './strip-phases.js';

const MICROSECONDS = 1_000_000;
const LEAST_LOST_BAND_PX = 6;
const FLAG_HEIGHT = 22;
const FLAG_LETTER_PX = 8;
const FLAG_MARGIN_PX = 8;

export interface StripChartProps {
  capture: Capture;
  sheet: Sheet;
  answer: DecodeAnswer;
  view: DecodeView;
}

const range = (count: number): number[] => Array.from({ length: Math.max(0, count) }, (_, index) => index);

function describe(segment: Segment): string {
  const at = `${segment.fromS.toFixed(1)} to ${segment.toS.toFixed(1)} s`;
  if (segment.kind === 'code') return `Code ${segment.code} from ${at}.`;
  return `${segment.kind === 'ready' ? 'Ready blink' : segment.kind === 'dark' ? 'Dark' : 'Unreadable'} from ${at}.`;
}

function Seconds({ strip }: { strip: Strip }) {
  const whole = Math.floor(strip.durationS);
  const bottom = strip.paperBottom;
  const line = (second: number, margin: number): string => `M${strip.xOf(second)} ${margin}V${bottom - margin}`;
  return (
    <>
      <rect className="paper" width={strip.width} height={bottom} />
      <path className="paper-edge" d={`M0 .5H${strip.width}M0 ${bottom - 0.5}H${strip.width}`} />
      <path
        className="second"
        d={range(whole)
          .filter((second) => second % 5 !== 0)
          .map((second) => line(second, 20))
          .join('')}
      />
      <path
        className="fifth"
        d={range(Math.floor(whole / 5))
          .map((fifth) => line((fifth + 1) * 5, 16))
          .join('')}
      />
      <path
        className="slots"
        d={range(whole)
          .flatMap((second) => [7, bottom - 8].map((y) => `M${strip.xOf(second + 0.5) - 4} ${y}h8`))
          .join('')}
      />
      {range(Math.floor(strip.durationS / 5) + 1).map((fifth) => (
        <text
          key={fifth}
          className="quiet"
          x={strip.xOf(fifth * 5)}
          y={bottom + 14}
          textAnchor={fifth === 0 ? 'start' : strip.width - strip.xOf(fifth * 5) < 24 ? 'end' : 'middle'}
        >
          {fifth * 5}
          {fifth === Math.floor(strip.durationS / 5) ? ' s' : ''}
        </text>
      ))}
    </>
  );
}

function Lane({
  lane,
  capture,
  view,
  strip,
  label,
}: {
  lane: Strip['lanes'][number];
  capture: Capture;
  view: DecodeView;
  strip: Strip;
  label: boolean;
}) {
  const seen = view.lamps.find((lamp) => lamp.id === lane.lamp.id);
  const path = useMemo(() => tracePath(capture, strip, lane), [capture, strip, lane]);
  const byKeys = capture.header.source === 'keys';
  const topOfLit = strip.yOf(lane.floorY, seen?.litLevel ?? capture.header.scale.max);
  const thresholdY =
    seen?.threshold === null || seen?.threshold === undefined || byKeys ? undefined : strip.yOf(lane.floorY, seen.threshold);
  return (
    <g className={`lamp-${lane.lamp.colour}`}>
      <path className="lane-floor" d={`M0 ${lane.floorY + 3}H${strip.width}`} />
      <path
        className="lit"
        d={(seen?.lit ?? [])
          .map(({ fromS, toS }) => `M${strip.xOf(fromS)} ${lane.floorY}V${topOfLit}H${strip.xOf(toS)}V${lane.floorY}z`)
          .join('')}
      />
      {thresholdY !== undefined && <path className="threshold" d={`M0 ${thresholdY}H${strip.width}`} />}
      <path className="trace" d={path} />
      {label && thresholdY !== undefined && (
        <text className="quiet" x={darkX(seen?.lit ?? [], strip)} y={thresholdY - 4}>
          threshold
        </text>
      )}
    </g>
  );
}

/** Where a lamp is dark for long enough that a word fits. */
function darkX(lit: readonly { fromS: number; toS: number }[], strip: Strip): number {
  const edges = [0, ...lit.flatMap(({ fromS, toS }) => [fromS, toS]), strip.durationS];
  let best = { x: 4, width: 0 };
  for (let index = 0; index < edges.length; index += 2) {
    const x = strip.xOf(edges[index] ?? 0);
    const width = strip.xOf(edges[index + 1] ?? 0) - x;
    if (width > best.width) best = { x: x + 4, width };
  }
  return best.x;
}

/** Which lane has the longest dark stretch: there the word "threshold" stands once. */
function labelledLamp(view: DecodeView, durationS: number): string | undefined {
  const longest = view.lamps.map((lamp) => {
    const edges = [0, ...lamp.lit.flatMap(({ fromS, toS }) => [fromS, toS]), durationS];
    const dark = edges.flatMap((edge, index) => (index % 2 === 0 ? [(edges[index + 1] ?? edge) - edge] : []));
    return { id: lamp.id, darkS: lamp.threshold === null ? -1 : Math.max(0, ...dark) };
  });
  return longest.sort((a, b) => b.darkS - a.darkS)[0]?.id;
}

function Marks({ capture, strip }: { capture: Capture; strip: Strip }) {
  const lanesBottom = strip.paperBottom - 22;
  const lostPx = (lost: number): number =>
    Math.max(LEAST_LOST_BAND_PX, capture.header.sampleRateHz ? strip.xOf(lost / capture.header.sampleRateHz) : 0);
  return (
    <>
      {capture.gaps.map(({ atUs, lost }, index) => {
        const x = strip.xOf(atUs / MICROSECONDS);
        return (
          <g key={index}>
            <rect className="hatch" x={x - lostPx(lost) / 2} y="44" width={lostPx(lost)} height={lanesBottom - 44} />
            <text className="quiet middle" x={x} y="34">
              {lost} lost
            </text>
          </g>
        );
      })}
      {capture.marks.map(({ atUs, label }, index) => {
        const x = strip.xOf(atUs / MICROSECONDS);
        const width = label.length * FLAG_LETTER_PX + 2 * FLAG_MARGIN_PX;
        return (
          <g key={index}>
            <path className="mark-line" d={`M${x} 18V${lanesBottom}`} />
            <rect className="flag" x={x} y="18" width={width} height={FLAG_HEIGHT} />
            <text className="flag-word middle" x={x + width / 2} y="34">
              {label}
            </text>
          </g>
        );
      })}
    </>
  );
}

/** A capture on strip-chart paper: a lane a lamp, time to the right, the decoded phases and codes under it. */
export function StripChart({ capture, sheet, answer, view }: StripChartProps) {
  const strip = useMemo(() => stripOf(capture, sheet, answer.durationS), [capture, sheet, answer.durationS]);
  const weights: Readonly<Record<string, number>> = sheet.coding.kind === 'weighted-phases' ? sheet.coding.weights : {};
  const labelled = labelledLamp(view, strip.durationS);
  const lanes = strip.lanes.map((lane) => lane.lamp.label).join(', ');
  const told = [
    `Strip chart, ${answer.durationS.toFixed(1)} seconds. Lanes: ${lanes}.`,
    ...capture.marks.map((mark) => `Mark “${mark.label}” at ${(mark.atUs / MICROSECONDS).toFixed(1)} s.`),
    ...answer.segments.map(describe),
    'The same stands in a table below.',
  ].join(' ');
  return (
    <div className="strip-scroll" tabIndex={0} role="region" aria-label="Strip chart">
      <svg className="strip strip-names" width={NAMES_WIDTH} height={strip.height} aria-hidden="true">
        <text className="quiet" x="120" y="34" textAnchor="end">
          {Object.keys(weights).length > 0 ? 'weight' : ''}
        </text>
        {strip.lanes.map(({ lamp, floorY }) => (
          <g key={lamp.id} className={`lamp-${lamp.colour}`}>
            <path className="lane-floor" d={`M0 ${floorY + 3}H${NAMES_WIDTH}`} />
            <circle className="lamp-lit" cx="9" cy={floorY - 19.5} r="7.5" strokeWidth="1.5" />
            <text className="lane-name" x="30" y={floorY - 14.5}>
              {lamp.label}
            </text>
            <text className="middle" x="110" y={floorY - 14.5} fontSize="16">
              {weights[lamp.id]}
            </text>
          </g>
        ))}
        <text className="lane-name" x="0" y={strip.paperBottom + 42}>
          Phases
        </text>
        <text className="lane-name" x="0" y={strip.paperBottom + 81}>
          Code
        </text>
      </svg>
      <svg className="strip" width={strip.width} height={strip.height} role="img" aria-label={told}>
        <Seconds strip={strip} />
        {strip.lanes.map((lane) => (
          <Lane key={lane.lamp.id} lane={lane} capture={capture} view={view} strip={strip} label={lane.lamp.id === labelled} />
        ))}
        <Marks capture={capture} strip={strip} />
        <StripPhases strip={strip} answer={answer} view={view} sheet={sheet} />
      </svg>
      <svg className="strip" width={LEVELS_WIDTH} height={strip.height} aria-hidden="true">
        <text className="quiet" x="12" y="34">
          lit level
        </text>
        {strip.lanes.map(({ lamp, column, floorY }) => {
          const fraction = view.lamps.find((one) => one.id === lamp.id)?.litFraction ?? null;
          const weak = fraction !== null && fraction < WEAK_BELOW;
          return (
            <g key={lamp.id}>
              <path className="lane-floor" d={`M0 ${floorY + 3}H${LEVELS_WIDTH}`} />
              <text className={weak ? 'strong' : ''} x="12" y={floorY - 14.5}>
                {column < 0 ? 'not in file' : fraction === null ? 'never lit' : `${Math.round(fraction * 100)} %${weak ? ' weak' : ''}`}
              </text>
            </g>
          );
        })}
      </svg>
    </div>
  );
}
