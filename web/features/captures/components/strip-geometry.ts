import type { Capture } from '../../../../shared/lamps/capture.js';
import type { Lamp, Sheet } from '../../../../shared/sheet/schema.js';
import { thinTrace, type Point } from './thin-trace.js';

/** The paper's measures in px, from the look's rules. */
export const NAMES_WIDTH = 126;
export const LEVELS_WIDTH = 92;
export const LANE_HEIGHT = 45;
export const LEVEL_HEIGHT = 36;
const FIRST_FLOOR_Y = 88;
const UNDER_FLOOR = 3;
const PAPER_BELOW_LANES = 22;
/** Full height of a lane is this share of full scale: lit lamps rarely reach it. */
const FULL_LANE = 0.88;
const TRACE_ERROR_PX = 0.6;

/** A lamp that lights below this share of full scale is hard to read: clean or move the sensor. */
export const WEAK_BELOW = 0.5;

const PAPER_WIDTH = 1142;
const LEAST_PX_PER_SECOND = 28.5;
const MOST_PX_PER_SECOND = 57;
/** Browsers draw no wider picture well; an hour then has fewer px a second. */
const WIDEST_PAPER = 16_000;

export interface Strip {
  durationS: number;
  width: number;
  lanes: { lamp: Lamp; column: number; floorY: number }[];
  paperBottom: number;
  height: number;
  xOf: (seconds: number) => number;
  yOf: (floorY: number, level: number) => number;
}

/** Where things stand on the strip-chart paper of a capture: a lane for each lamp of the sheet, in panel order. */
export function stripOf(capture: Capture, sheet: Sheet, durationS: number): Strip {
  const seconds = Math.max(1, durationS);
  const pxPerSecond = Math.min(
    Math.max(PAPER_WIDTH / seconds, LEAST_PX_PER_SECOND),
    MOST_PX_PER_SECOND,
    Math.max(1, WIDEST_PAPER / seconds),
  );
  const lanes = sheet.lamps.map((lamp, index) => ({
    lamp,
    column: capture.header.lamps.indexOf(lamp.id),
    floorY: FIRST_FLOOR_Y + LANE_HEIGHT * index,
  }));
  const paperBottom = FIRST_FLOOR_Y + UNDER_FLOOR + LANE_HEIGHT * (lanes.length - 1) + PAPER_BELOW_LANES;
  const { max } = capture.header.scale;
  return {
    durationS: seconds,
    width: Math.ceil(seconds * pxPerSecond),
    lanes,
    paperBottom: paperBottom + UNDER_FLOOR,
    height: paperBottom + UNDER_FLOOR + 88,
    xOf: (at) => at * pxPerSecond,
    yOf: (floorY, level) => floorY - Math.min(1, level / (FULL_LANE * max)) * LEVEL_HEIGHT,
  };
}

const MICROSECONDS = 1_000_000;
const rounded = (value: number): string => String(Math.round(value * 10) / 10);

/** The trace of one lane as an SVG path: what the probe saw; by keys a level holds until the next sample, so it is square. */
export function tracePath(capture: Capture, strip: Strip, lane: Strip['lanes'][number]): string {
  const levels = capture.levels[lane.column];
  if (!levels) return '';
  const points: Point[] = [];
  const square = capture.header.source === 'keys';
  levels.forEach((level, sample) => {
    const x = strip.xOf((capture.timesUs[sample] ?? 0) / MICROSECONDS);
    const before = points.at(-1);
    if (square && before) points.push({ x, y: before.y });
    points.push({ x, y: strip.yOf(lane.floorY, level) });
  });
  const last = points.at(-1);
  if (square && last) points.push({ x: strip.xOf(strip.durationS), y: last.y });
  return thinTrace(points, TRACE_ERROR_PX)
    .map(({ x, y }, index) => `${index === 0 ? 'M' : 'L'}${rounded(x)} ${rounded(y)}`)
    .join('');
}
