import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { parseSampleLine, writeSampleLine } from '../../../cli/instruments/sample-line.js';
import { SampleTimeline } from '../../../cli/instruments/sample-timeline.js';

describe('parseSampleLine', () => {
  // Form: contract, section 6. The checks were computed by hand as the XOR of the bytes between $ and *.
  test.each(['$9435,42,60*0B', '$9435,42,60*0b'])('When a line is sound (%s), then time and levels are read', (line) => {
    expect(parseSampleLine(line, 2, 1023)).toEqual({ tUs: 9435, levels: [42, 60] });
  });

  test('When a sample is written, then it is the line that is read', () => {
    expect(writeSampleLine({ tUs: 9435, levels: [42, 60] })).toBe('$9435,42,60*0B');
  });

  test.each([
    ['a wrong check', '$9435,42,60*0C'],
    ['a check of one digit', '$9435,42,60*0'],
    ['no dollar', '9435,42,60*0B'],
    ['too few levels', writeSampleLine({ tUs: 1, levels: [1] })],
    ['too many levels', writeSampleLine({ tUs: 1, levels: [1, 2, 3] })],
    ['a level off the scale', writeSampleLine({ tUs: 1, levels: [1024, 2] })],
    ['half a line', '$9435,4'],
    ['another message', '0,"No error"'],
    ['nothing', ''],
  ])('When a line has %s, then it is damaged', (_what, line) => {
    expect(parseSampleLine(line, 2, 1023)).toBeUndefined();
  });

  test('When one bit of a line is wrong, then it is never a sample', () => {
    fc.assert(
      fc.property(
        fc.nat(2 ** 32 - 1),
        fc.array(fc.nat(1023), { minLength: 6, maxLength: 6 }),
        fc.nat(1000),
        fc.nat(6),
        (tUs, levels, place, bit) => {
          const line = writeSampleLine({ tUs, levels });
          const at = place % line.length;
          const hurt = line.slice(0, at) + String.fromCharCode(line.charCodeAt(at) ^ (1 << bit)) + line.slice(at + 1);
          // A letter of the check in the other case is the same check.
          return hurt.toUpperCase() === line || parseSampleLine(hurt, 6, 1023) === undefined;
        },
      ),
    );
  });
});

/** Pushes [probe clock, bench clock] pairs, undefined for a damaged line, at 100 Hz. */
function played(steps: (readonly [number, number] | undefined)[]) {
  const timeline = new SampleTimeline(100);
  return [...steps.flatMap((step) => timeline.push(step && { tUs: step[0], levels: [1] }, step?.[1] ?? 0)), ...timeline.finish()].map(
    (event) => (event.kind === 'sample' ? event.tUs : { at: event.atUs, lost: event.lost }),
  );
}

describe('SampleTimeline', () => {
  test('When the probe has been on for a while, then times count from the first sample', () => {
    expect(
      played([
        [5_000_000, 0],
        [5_010_000, 10_000],
        [5_019_500, 20_000],
      ]),
    ).toEqual([0, 10_000, 19_500]);
  });

  // Contract, section 6: `lost` counts wrong checksums and holes of more than 1.5 nominal periods.
  test('When a hole is more than 1.5 periods, then the lines missing in it are counted', () => {
    expect(
      played([
        [0, 0],
        [15_000, 0],
        [30_001, 0],
        [70_001, 0],
      ]),
    ).toEqual([0, 15_000, { at: 25_000, lost: 1 }, 30_001, { at: 40_001, lost: 3 }, 70_001]);
  });

  test('When a damaged line leaves a hole, then it is one loss and not two', () => {
    expect(played([[0, 0], undefined, [20_000, 0]])).toEqual([0, { at: 10_000, lost: 1 }, 20_000]);
  });

  test('When damaged lines stand at the beginning and at the end, then they are counted there', () => {
    expect(played([undefined, [100, 0], undefined, undefined])).toEqual([{ at: 0, lost: 1 }, 0, { at: 10_000, lost: 2 }]);
  });

  test('When the clock wraps at 2^32, then time goes on evenly', () => {
    const end = 2 ** 32;
    expect(
      played([
        [end - 10_000, 0],
        [0, 0],
        [10_000, 0],
      ]),
    ).toEqual([0, 10_000, 20_000]);
    expect(
      played([
        [end - 10_000, 0],
        [20_000, 0],
      ]),
    ).toEqual([0, { at: 10_000, lost: 2 }, 30_000]);
  });

  test('When the probe starts again, then it is a gap as long as the bench says, and time goes on', () => {
    expect(
      played([
        [8_000_000, 1_000],
        [8_010_000, 11_000],
        [500, 1_211_000],
        [10_500, 1_221_000],
      ]),
    ).toEqual([0, 10_000, { at: 20_000, lost: 119 }, 1_210_000, 1_220_000]);
  });

  test('When the probe starts again and the bench saw no time pass, then there is a gap all the same', () => {
    expect(
      played([
        [8_000_000, 0],
        [0, 0],
        [10_000, 0],
      ]),
    ).toEqual([0, { at: 10_000, lost: 1 }, 20_000, 30_000]);
  });

  // Found on paper: an XOR of eight bits does not see two equal changes, in a time as little as in a level.
  test.each([
    ['falls', 3_000_000],
    ['jumps ahead', 900_000_000],
  ])('When the time of one line %s and the next goes on as before, then that line was damaged', (_how, wrong) => {
    expect(
      played([
        [8_000_000, 0],
        [8_010_000, 10_000],
        [wrong, 20_000],
        [8_030_000, 30_000],
      ]),
    ).toEqual([0, 10_000, { at: 20_000, lost: 1 }, 30_000]);
    expect(
      played([
        [8_000_000, 0],
        [wrong, 10_000],
      ]),
    ).toEqual([0, { at: 10_000, lost: 1 }]);
  });

  test('When the bench was asleep and lines come all at once, then the probe tells the time', () => {
    expect(
      played([
        [0, 0],
        [10_000, 300_000_000],
        [299_990_000, 300_000_000],
        [300_000_000, 300_010_000],
      ]),
    ).toEqual([0, 10_000, { at: 20_000, lost: 29_997 }, 299_990_000, 300_000_000]);
  });

  test.each([
    ['kept its clock', 5_010_000, 5_020_000, 5_010_000, 500],
    ['began again at a later time than before', 900_000, 910_000, 5_010_000, 500],
    ['began again at 0', 0, 10_000, 5_010_000, 500],
  ])('When the port was away for five seconds and the probe %s, then five seconds are missing', (_what, one, next, tUs, lost) => {
    const timeline = new SampleTimeline(100);
    const push = (probeUs: number, benchUs: number) => timeline.push({ tUs: probeUs, levels: [1] }, benchUs);
    push(0, 0);
    push(10_000, 10_000);
    timeline.away();
    const events = [...push(one, 5_010_000), ...push(next, 5_020_000)];
    // 5 s at 100 Hz, less the sample that came.
    expect(events[0]).toEqual({ kind: 'gap', atUs: 20_000, lost: lost - 1 });
    expect(events.slice(1).map((event) => event.kind === 'sample' && event.tUs)).toEqual([tUs, tUs + 10_000]);
  });

  test('When anything comes, then time never falls and every loss has a number', () => {
    const step = fc.option(fc.tuple(fc.nat(2 ** 32 - 1), fc.nat(1e9)), { nil: undefined });
    fc.assert(
      fc.property(fc.array(step), (steps) => {
        const events = played(steps);
        const times = events.filter((event) => typeof event === 'number');
        return (
          times.every((time, index) => index === 0 || time >= (times[index - 1] ?? 0)) &&
          events.every((event) => typeof event === 'number' || event.lost >= 1)
        );
      }),
    );
  });
});
