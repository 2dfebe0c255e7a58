import { describe, expect, test } from 'vitest';
import type { DecodeView } from '../../../shared/decode/answer.js';
import { clock, judgeWatch, watchSpec } from '../../../shared/script/judge-watch.js';
import { heron } from '../../helpers/unit-facts.js';

type Lit = { fromS: number; toS: number }[];
const viewOf = (lit: Record<string, Lit>): DecodeView => ({
  lamps: heron.lamps.map(({ id }) => ({ id, threshold: null, litLevel: null, litFraction: null, lit: lit[id] ?? [] })),
  phases: [],
});
const calibration = watchSpec({ id: 'calibration', kind: 'watch', title: 'Calibration run', calibration: true }, heron);

describe('Watching a calibration run', () => {
  // Common practice, no published source: a washer's calibration cycle takes some 2 to 3 minutes and ends well when the lid unlocks and the machine switches itself off.
  test('When the lid is locked for 2:30 and then every lamp goes out, then it passes', () => {
    const view = viewOf({ lock: [{ fromS: 3, toS: 153 }], wash: [{ fromS: 3, toS: 153 }] });
    expect(judgeWatch(view, calibration, 160)).toEqual({
      seconds: 150,
      verdict: 'pass',
      reason: '2:30, the sheet allows 2:00 to 3:00',
      over: true,
      begun: true,
    });
  });
  test('When the lid unlocks but the machine does not switch itself off, then it has not ended', () => {
    const view = viewOf({ lock: [{ fromS: 3, toS: 153 }], wash: [{ fromS: 3, toS: 200 }] });
    expect(judgeWatch(view, calibration, 200)).toMatchObject({ verdict: 'fail', reason: 'still going after 180 s', over: true });
  });
  test('When every lamp is dark for 4 s on the way, then that is no end', () => {
    const view = viewOf({
      lock: [
        { fromS: 3, toS: 126 },
        { fromS: 130, toS: 390 },
      ],
    });
    expect(judgeWatch(view, calibration, 400)).toMatchObject({ seconds: 387, verdict: 'fail' });
  });
  test('When it ends too soon, then it fails', () => {
    expect(judgeWatch(viewOf({ lock: [{ fromS: 3, toS: 63 }] }), calibration, 70)).toMatchObject({ seconds: 60, verdict: 'fail' });
  });
  test('When it runs past the most, then it fails', () => {
    expect(judgeWatch(viewOf({ lock: [{ fromS: 3, toS: 190 }] }), calibration, 200)).toMatchObject({ verdict: 'fail' });
  });
  test('When it never begins, then it is inconclusive and not over', () => {
    expect(judgeWatch(viewOf({}), calibration, 60)).toMatchObject({ verdict: 'inconclusive', begun: false, over: false });
  });
  test('When the capture stops half-way, then it is inconclusive', () => {
    expect(judgeWatch(viewOf({ lock: [{ fromS: 3, toS: 63 }] }), calibration, 63.5)).toMatchObject({
      verdict: 'inconclusive',
      over: false,
      begun: true,
    });
  });
  // Computed by hand from the rule: what changed in a hole shows at its end and may have changed at its beginning; 2:00 to 3:00 is allowed.
  test.each([
    [
      'the end falls into one and may have come too soon',
      { fromS: 3, toS: 153 },
      [{ fromS: 119, toS: 153 }],
      'inconclusive',
      /between 1:56 and 2:30/,
    ],
    [
      'the beginning falls into one and may have been too long ago',
      { fromS: 20, toS: 190 },
      [{ fromS: 2, toS: 20 }],
      'inconclusive',
      /between 2:50 and 3:08/,
    ],
    ['the end falls into one that changes nothing', { fromS: 3, toS: 153 }, [{ fromS: 151, toS: 153 }], 'pass', /2:30/],
    ['a long one lies between', { fromS: 3, toS: 153 }, [{ fromS: 40, toS: 46 }], 'inconclusive', /nothing was seen from 0:40 to 0:46/],
    ['a short one lies between', { fromS: 3, toS: 153 }, [{ fromS: 40, toS: 44 }], 'pass', /2:30/],
    ['one lies before', { fromS: 30, toS: 180 }, [{ fromS: 2, toS: 22 }], 'pass', /2:30/],
  ] as const)('When nothing was seen for a while and %s, then it is judged so', (_where, lock, holes, verdict, reason) => {
    const judged = judgeWatch(viewOf({ lock: [lock] }), calibration, lock.toS + 10, holes);
    expect(judged).toMatchObject({ verdict, over: true });
    expect(judged.reason).toMatch(reason);
  });
  test('When the probe was away until the end, then darkness that nobody saw is no end', () => {
    expect(judgeWatch(viewOf({ lock: [{ fromS: 3, toS: 153 }] }), calibration, 170, [{ fromS: 155, toS: 170 }])).toMatchObject({
      verdict: 'inconclusive',
      over: false,
    });
  });
  test('When it is still going after the most and a long hole lies in it, then it may have ended unseen', () => {
    expect(judgeWatch(viewOf({ lock: [{ fromS: 3, toS: 200 }] }), calibration, 200, [{ fromS: 60, toS: 80 }]).verdict).toBe('inconclusive');
  });

  test('When the lock lamp blinks dark for a second in between, then that is no end', () => {
    const view = viewOf({
      lock: [
        { fromS: 3, toS: 60 },
        { fromS: 61, toS: 153 },
      ],
    });
    expect(judgeWatch(view, calibration, 160)).toMatchObject({ seconds: 150, verdict: 'pass' });
  });
});

test('When a script names its own pattern, then it is watched for within its own time', () => {
  const spec = watchSpec(
    { id: 'w', kind: 'watch', title: 'Pump', begins: { drain: 'on' }, ends: { drain: 'off' }, withinS: [5, 20] },
    heron,
  );
  expect(judgeWatch(viewOf({ drain: [{ fromS: 1, toS: 11 }], lock: [{ fromS: 0, toS: 30 }] }), spec, 30)).toMatchObject({
    seconds: 10,
    verdict: 'pass',
  });
});

test('When seconds are read off a clock, then they carry over', () => {
  expect([clock(150), clock(59.6), clock(5)]).toEqual(['2:30', '1:00', '0:05']);
});
