export interface Point {
  x: number;
  y: number;
}

/** How far a point lies from the straight line between two others. */
function distanceFromLine(point: Point, from: Point, to: Point): number {
  const dx = to.x - from.x;
  const dy = to.y - from.y;
  const length = Math.hypot(dx, dy);
  if (length === 0) return Math.hypot(point.x - from.x, point.y - from.y);
  return Math.abs(dy * (point.x - from.x) - dx * (point.y - from.y)) / length;
}

/**
 * Leaves out what the eye cannot miss: the points that lie within `tolerancePx` of the line between those kept
 * (Ramer 1972, Douglas and Peucker 1973). Never smooths: every point kept is one that was there.
 */
export function thinTrace(points: readonly Point[], tolerancePx: number): Point[] {
  if (points.length < 3) return [...points];
  const keep = new Uint8Array(points.length);
  keep[0] = 1;
  keep[points.length - 1] = 1;
  const open: [number, number][] = [[0, points.length - 1]];
  for (let stretch = open.pop(); stretch; stretch = open.pop()) {
    const [from, to] = stretch;
    let farthest = -1;
    let distance = tolerancePx;
    for (let index = from + 1; index < to; index += 1) {
      const here = distanceFromLine(points[index] as Point, points[from] as Point, points[to] as Point);
      if (here > distance) {
        distance = here;
        farthest = index;
      }
    }
    if (farthest < 0) continue;
    keep[farthest] = 1;
    open.push([from, farthest], [farthest, to]);
  }
  return points.filter((_, index) => keep[index] === 1);
}
