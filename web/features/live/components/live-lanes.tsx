import { useEffect, useRef, useState } from 'react';
import { lampsNow, thresholdOf, type LampNow, type LiveCapture } from '../live-state.js';

/** A live strip chart moves by whole steps, 4 a second at most (the look's rules for motion). */
const STEP_MS = 250;
const PX_PER_SECOND = 19;
const LANE_HEIGHT = 34;
const LEVEL_HEIGHT = 26;
/** Full height of a lane is this share of full scale: lit lamps rarely reach it. */
const FULL_LANE_PERCENT = 88;
const PAPER_EDGE = 8;

/** The newest value, at most so often. */
function useAtMostEvery<T>(value: T, milliseconds: number): T {
  const [shown, setShown] = useState(value);
  const newest = useRef(value);
  newest.current = value;
  useEffect(() => {
    const timer = setInterval(() => setShown(newest.current), milliseconds);
    return () => clearInterval(timer);
  }, [milliseconds]);
  return shown;
}

function useWidth(): [(element: HTMLElement | null) => void, number] {
  const [width, setWidth] = useState(0);
  const observer = useRef<ResizeObserver | undefined>(undefined);
  const attach = useRef((element: HTMLElement | null): void => {
    observer.current?.disconnect();
    if (!element) return;
    setWidth(element.clientWidth);
    observer.current = new ResizeObserver(() => setWidth(element.clientWidth));
    observer.current.observe(element);
  });
  return [attach.current, width];
}

const reducedMotion = (): boolean => window.matchMedia('(prefers-reduced-motion: reduce)').matches;

/** One lamp now: what the probe saw; what flashes too fast to be shown as flashes is drawn lit, with its rate and the word. */
function LampNowSign({ lamp, lit, fast }: LampNow) {
  return (
    <svg
      width="26"
      height="26"
      viewBox="-13 -13 26 26"
      className={`flex-none lamp-${lamp.colour}`}
      data-lamp={lamp.id}
      data-lit={lit || fast}
      aria-hidden="true"
    >
      {lit || fast ? <circle className="lamp-lit" r="8" strokeWidth="1.75" /> : <circle className="lamp-dark" r="8" strokeWidth="1.5" />}
      {fast && <path className="live-rate" d="M-11.5 11h4M-5 11h4M1.5 11h4M8 11h4" />}
    </svg>
  );
}

function lanePaths(capture: LiveCapture, lamp: number, fromMs: number, floorY: number): { trace: string; lit: string } {
  const x = (ms: number): number => Math.round(((ms - fromMs) * PX_PER_SECOND) / 100) / 10;
  const y = (percent: number): number => Math.round((floorY - Math.min(1, percent / FULL_LANE_PERCENT) * LEVEL_HEIGHT) * 10) / 10;
  const threshold = thresholdOf(capture, lamp);
  const square = capture.began.byKeys;
  let trace = '';
  let lit = '';
  let litFrom: number | undefined;
  let before: number | undefined;
  const rows = capture.rows;
  const first = Math.max(
    0,
    rows.findLastIndex(([ms = 0]) => ms < fromMs),
  );
  for (const row of rows.slice(first)) {
    const ms = row[0] ?? 0;
    const level = row[lamp + 1] ?? 0;
    if (square && before !== undefined) trace += `L${x(ms)} ${y(before)}`;
    trace += `${trace === '' ? 'M' : 'L'}${x(ms)} ${y(level)}`;
    before = level;
    if (level > threshold) litFrom ??= ms;
    else if (litFrom !== undefined) {
      lit += `M${x(litFrom)} ${floorY}V${floorY - LEVEL_HEIGHT}H${x(ms)}V${floorY}z`;
      litFrom = undefined;
    }
  }
  if (litFrom !== undefined) lit += `M${x(litFrom)} ${floorY}V${floorY - LEVEL_HEIGHT}H${x(rows.at(-1)?.[0] ?? litFrom)}V${floorY}z`;
  return { trace, lit };
}

/** The lamps as they are, and their lanes of the last seconds on strip-chart paper. Nothing of it is read out: the step and its verdict are. */
export function LiveLanes({ capture }: { capture: LiveCapture }) {
  const drawn = useAtMostEvery(capture, STEP_MS);
  const [paper, width] = useWidth();
  const spanMs = Math.max(1, Math.floor(width / PX_PER_SECOND)) * 1000;
  const lastMs = drawn.rows.at(-1)?.[0] ?? 0;
  // With less motion the paper is filled from left to right and turned when it is full.
  const fromMs = reducedMotion() ? Math.floor(lastMs / spanMs) * spanMs : Math.max(0, Math.ceil((lastMs - spanMs) / STEP_MS) * STEP_MS);
  const { lamps } = capture.began;
  const height = lamps.length * LANE_HEIGHT + 2 * PAPER_EDGE;
  const bottomOf = (lane: number): number => PAPER_EDGE + (lane + 1) * LANE_HEIGHT - 4;
  const seconds = Array.from({ length: Math.ceil(spanMs / 1000) + 1 }, (_, at) => Math.ceil(fromMs / 1000) + at);
  const xOf = (ms: number): number => ((ms - fromMs) * PX_PER_SECOND) / 1000;
  const now = lampsNow(capture);
  return (
    <div className="live-lanes">
      <ul style={{ paddingBlock: PAPER_EDGE }}>
        {now.map((one) => (
          <li key={one.lamp.id} style={{ height: LANE_HEIGHT }}>
            <LampNowSign {...one} />
            <span className="min-w-0 truncate">{one.lamp.label}</span>
            {one.fast ? <span className="lab">fast</span> : one.lamp.weight !== undefined && <span className="num">{one.lamp.weight}</span>}
          </li>
        ))}
      </ul>
      <div ref={paper} className="min-w-0 flex-1 overflow-hidden">
        {width > 0 && (
          <svg
            className="live-paper"
            width={width}
            height={height}
            role="img"
            aria-label={`Lanes of ${lamps.map(({ label }) => label).join(', ')}, as they come`}
          >
            <rect className="paper" width={width} height={height} />
            <path className="paper-edge" d={`M0 .5H${width}M0 ${height - 0.5}H${width}`} />
            <path
              className="second"
              d={seconds
                .filter((second) => second % 5 !== 0)
                .map((second) => `M${xOf(second * 1000)} 4V${height - 4}`)
                .join('')}
            />
            <path
              className="fifth"
              d={seconds
                .filter((second) => second % 5 === 0)
                .map((second) => `M${xOf(second * 1000)} 2V${height - 2}`)
                .join('')}
            />
            {lamps.map((lamp, lane) => {
              const floorY = bottomOf(lane);
              const { trace, lit } = lanePaths(drawn, lane, fromMs, floorY);
              const threshold = drawn.began.byKeys ? undefined : (drawn.code?.thresholds[lane] ?? undefined);
              const thresholdY = threshold === undefined ? 0 : floorY - Math.min(1, threshold / FULL_LANE_PERCENT) * LEVEL_HEIGHT;
              return (
                <g key={lamp.id} className={`lamp-${lamp.colour}`}>
                  <path className="lane-floor" d={`M0 ${floorY + 2}H${width}`} />
                  <path className="lit" d={lit} />
                  {threshold !== undefined && <path className="threshold" d={`M0 ${thresholdY}H${width}`} />}
                  <path className="trace" d={trace} />
                </g>
              );
            })}
            {drawn.marksMs
              .filter((ms) => ms >= fromMs)
              .map((ms) => (
                <g key={ms}>
                  <path className="mark-line" d={`M${xOf(ms)} 0V${height}`} />
                  <rect className="flag" x={xOf(ms)} width="48" height="20" />
                  <text className="flag-word middle" x={xOf(ms) + 24} y="15">
                    next
                  </text>
                </g>
              ))}
          </svg>
        )}
      </div>
    </div>
  );
}
