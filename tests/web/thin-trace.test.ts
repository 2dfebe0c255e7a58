import fc from 'fast-check';
import { expect, test } from 'vitest';
import { thinTrace, type Point } from '../../web/features/captures/components/thin-trace.js';

// Expected values are computed by hand from the rule: a point is left out when it lies within the tolerance of the line between its kept neighbours.

test('When points lie on one line, then only its ends are kept', () => {
  const line = [0, 1, 2, 3, 4].map((x) => ({ x, y: 2 * x }));
  expect(thinTrace(line, 0.6)).toEqual([
    { x: 0, y: 0 },
    { x: 4, y: 8 },
  ]);
});

test('When a point stands off by more than the tolerance, then it is kept as it was', () => {
  const bump = [
    { x: 0, y: 0 },
    { x: 5, y: 0.61 },
    { x: 10, y: 0 },
  ];
  expect(thinTrace(bump, 0.6)).toEqual(bump);
  expect(thinTrace(bump, 0.62)).toHaveLength(2);
});

test('When any trace is thinned, then no point that was left out is farther from the kept line than the tolerance', () => {
  const traces = fc
    .array(fc.integer({ min: 0, max: 360 }), { minLength: 3, maxLength: 200 })
    .map((levels): Point[] => levels.map((level, index) => ({ x: index * 1.5, y: level / 10 })));
  fc.assert(
    fc.property(traces, (trace) => {
      const kept = thinTrace(trace, 0.6);
      expect(kept[0]).toEqual(trace[0]);
      expect(kept.at(-1)).toEqual(trace.at(-1));
      for (const point of trace) {
        const after = kept.findIndex((one) => one.x >= point.x);
        const to = kept[after] as Point;
        const from = kept[Math.max(0, after - 1)] as Point;
        const length = Math.hypot(to.x - from.x, to.y - from.y);
        const distance =
          length === 0
            ? Math.hypot(point.x - to.x, point.y - to.y)
            : Math.abs((to.y - from.y) * (point.x - from.x) - (to.x - from.x) * (point.y - from.y)) / length;
        expect(distance).toBeLessThanOrEqual(0.6 + 1e-9);
      }
    }),
    { seed: 41, numRuns: 200 },
  );
});
