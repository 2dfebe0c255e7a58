import { describe, expect, test } from 'vitest';
import type { DecodeAnswer } from '../../../shared/decode/answer.js';
import { decodeCapture } from '../../../shared/decode/decode-capture.js';
import type { Capture } from '../../../shared/lamps/capture.js';
import { codeStates, readyBlinkStates } from '../../../shared/lamps/panel-states.js';
import { seededRandom } from '../../../shared/lamps/seeded-random.js';
import type { LampState, SimulatedLight } from '../../../shared/lamps/simulate-lamps.js';
import type { Sheet } from '../../../shared/sheet/schema.js';
import { expectInOrder } from '../../helpers/compare-answer.js';
import { heron, heronCoding } from '../../helpers/fixtures.js';
import { record } from '../../helpers/simulate-captures.js';

// What each situation must give follows from the contract, section 3; times are computed from the states that were played.
const LAMPS = heron.lamps.map((lamp) => lamp.id);
const PHASE_S = 1.2;
const dark = (seconds: number): LampState => ({ seconds, lit: [] });
const ready = readyBlinkStates(heron.ready?.lamps ?? [], 5, 0.9);
const same = (phases: number, phaseS = PHASE_S): number[] => new Array<number>(phases).fill(phaseS);
const code = (on: number, off: number, phases: readonly number[]): LampState[] => codeStates(heronCoding, on, off, phases, ['lock']);
/** 0.5 s dark, 4.5 s ready blink, 0.3 s dark: codes begin here. */
const CODES_FROM_S = 5.3;
const play = (states: readonly LampState[], light: Partial<SimulatedLight> = {}): Capture =>
  record(
    [dark(0.5), ...ready, dark(0.3), ...states, dark(0.7)],
    { lamps: LAMPS, sampleRateHz: 100, scaleMax: 1023, noise: 0.01, ...light },
    seededRandom(11),
  );
const withMarks = (capture: Capture, ...atS: number[]): Capture => ({
  ...capture,
  marks: atS.map((second) => ({ atUs: Math.round(second * 1e6), label: 'next' })),
});
const stated = (answer: DecodeAnswer): string[] => answer.codes.map(({ code: text, repeats }) => `${text} ${repeats ?? '-'}`);
const reasons = (answer: DecodeAnswer): string =>
  answer.segments.flatMap((segment) => (segment.kind === 'unreadable' ? [segment.reason] : [])).join('; ');
const decode = (capture: Capture, sheet: Sheet = heron): DecodeAnswer => {
  const answer = decodeCapture(capture, sheet);
  expectInOrder(answer);
  return answer;
};

describe('where a code ends', () => {
  test('When another code follows without a mark, then both are stated', () => {
    const answer = decode(play([...code(5, 3, same(8)), ...code(2, 9, same(6))]));
    expect(stated(answer)).toEqual(['G5K3 4', 'G2K9 3']);
    expect(answer.segments[1]?.toS).toBeCloseTo(CODES_FROM_S + 8 * PHASE_S, 1);
  });

  test('When only one digit changes without a mark, then the new code begins with its first digit', () => {
    const answer = decode(play([...code(5, 3, same(8)), ...code(5, 9, same(8))]));
    expect(stated(answer)).toEqual(['G5K3 4', 'G5K9 4']);
    expect(answer.segments[2]?.fromS).toBeCloseTo(CODES_FROM_S + 8 * PHASE_S, 1);
  });

  test('When a mark is pressed a little late, then it counts at the edge', () => {
    const answer = decode(withMarks(play(code(4, 4, same(12))), CODES_FROM_S + 4 * PHASE_S + 0.4));
    expect(stated(answer)).toEqual(['G4K4 2', 'G4K4 4']);
  });

  test('When the next code came up most of a phase before the mark, then it is not cut in two', () => {
    const answer = decode(withMarks(play([...code(5, 3, same(8)), ...code(2, 9, same(8))]), CODES_FROM_S + 8 * PHASE_S + 0.8));
    expect(stated(answer)).toEqual(['G5K3 4', 'G2K9 4']);
  });

  test('When a mark is pressed twice, then that is one mark', () => {
    const edgeS = CODES_FROM_S + 4 * PHASE_S;
    expect(stated(decode(withMarks(play(code(4, 4, same(12))), edgeS + 0.1, edgeS + 0.4)))).toEqual(['G4K4 2', 'G4K4 4']);
  });

  test('When the display begins anew with the same first digit at a mark, then neither code gains nor loses a repeat', () => {
    const capture = play([...code(7, 1, [...same(6), 0.6]), ...code(7, 2, same(6))]);
    expect(stated(decode(withMarks(capture, CODES_FROM_S + 6 * PHASE_S + 0.6)))).toEqual(['G7K1 3', 'G7K2 3']);
  });

  test('When a mark is far from any change, then a warning names it', () => {
    const answer = decode(withMarks(play([...code(4, 4, same(6)), dark(8)]), CODES_FROM_S + 6 * PHASE_S + 4));
    expect(stated(answer)).toEqual(['G4K4 3']);
    expect(answer.warnings.join('\n')).toMatch(/the mark at 16\.5 s is more than 1\.5 s from any change/);
  });

  test('When one turn of a code stands between others without a mark, then it is not stated', () => {
    const answer = decode(play([...code(5, 3, same(8)), ...code(2, 9, same(2)), ...code(6, 6, same(8))]));
    expect(stated(answer)).toEqual(['G5K3 4', 'G6K6 4']);
    expect(answer.segments.map(({ kind }) => kind)).toContain('unreadable');
  });

  test('When a ready blink stands between, then the same code is a new entry', () => {
    const answer = decode(play([...code(7, 1, same(6)), dark(0.4), ...ready, dark(0.4), ...code(7, 1, same(4))]));
    expect(stated(answer)).toEqual(['G7K1 3', 'G7K1 2']);
    expect(answer.segments.map(({ kind }) => kind)).toEqual(['ready', 'code', 'ready', 'code']);
  });

  test('When a second digit of 0 goes over into darkness, then that digit was seen whole', () => {
    const answer = decode(play([...code(4, 0, same(6)), dark(5), ...code(4, 0, same(8))]));
    expect(stated(answer)).toEqual(['G4K0 3', 'G4K0 4']);
    const darkness = answer.segments.find(({ kind }) => kind === 'dark');
    expect(darkness?.fromS).toBeCloseTo(CODES_FROM_S + 6 * PHASE_S, 1);
  });

  test('When the panel pauses dark for less than a phase between two codes, then both are whole', () => {
    const answer = decode(withMarks(play([...code(6, 2, same(6)), dark(0.8), ...code(3, 5, same(6))]), CODES_FROM_S + 6 * PHASE_S + 0.3));
    expect(stated(answer)).toEqual(['G6K2 3', 'G3K5 3']);
  });
});

describe('interruptions', () => {
  test("When a hand's shadow falls on less than a cycle, then the code goes on and the spoiled symbols count", () => {
    const capture = play(code(5, 7, same(12)), {
      shadows: [{ fromS: CODES_FROM_S + 4.4 * PHASE_S, toS: CODES_FROM_S + 5.9 * PHASE_S, share: 0.1 }],
    });
    expect(stated(decode(capture))).toEqual(['G5K7 6']);
  });

  test('When samples are missing for more than half a phase, then that symbol is not whole', () => {
    const capture = play(code(5, 7, same(12)), { holes: [{ fromS: CODES_FROM_S + 4.1 * PHASE_S, toS: CODES_FROM_S + 4.9 * PHASE_S }] });
    expect(stated(decode(capture))).toEqual(['G5K7 5']);
  });

  test('When samples are missing for less than half a phase, then nothing is lost', () => {
    const capture = play(code(5, 7, same(12)), {
      holes: [{ fromS: CODES_FROM_S + 4.8 * PHASE_S, toS: CODES_FROM_S + 5.2 * PHASE_S }],
      loss: 0.05,
    });
    expect(stated(decode(capture))).toEqual(['G5K7 6']);
  });

  test('When samples are missing for longer than a cycle, then the code ends there and the hole is unreadable', () => {
    const capture = play(code(5, 7, same(16)), { holes: [{ fromS: CODES_FROM_S + 6 * PHASE_S, toS: CODES_FROM_S + 10 * PHASE_S }] });
    const answer = decode(capture);
    expect(answer.codes.map((entry) => entry.code)).toEqual(['G5K7', 'G5K7']);
    expect(reasons(answer)).toMatch(/no samples came for 4\.8 s/);
  });

  test('When the capture begins and ends in the middle of a phase, then those symbols are not whole', () => {
    const answer = decode(play(code(6, 3, same(9)), { startS: CODES_FROM_S + 0.5 }));
    expect(stated(answer)).toEqual(['G6K3 4']);
  });
});

describe('burnt-out lamps', () => {
  test('When the selector is burnt out, then it is named and nothing is guessed', () => {
    const answer = decode(play(code(5, 3, same(8)), { burntOut: ['spin'] }));
    expect(answer.deadLamps).toEqual(['spin']);
    expect(answer.codes).toEqual([]);
    expect(reasons(answer)).toMatch(/selector lamp 'spin' is burnt out/);
  });

  test('When two lamps are burnt out, then both are named', () => {
    const answer = decode(play(code(5, 3, same(8)), { burntOut: ['wash', 'drain'] }));
    expect(answer.deadLamps).toEqual(['wash', 'drain']);
    expect(answer.codes).toEqual([]);
    expect(reasons(answer)).toMatch(/lamps 'wash' and 'drain' are burnt out/);
  });

  test('When a burnt-out lamp sees only its bright neighbours, then it is burnt out all the same', () => {
    const answer = decode(play(code(5, 3, same(8)), { burntOut: ['drain'], glow: 0.08 }));
    expect(answer.deadLamps).toEqual(['drain']);
    expect(stated(answer)).toEqual(['G5K3 4']);
  });

  test('When the ready blink misses a lamp that the code lights, then that lamp is not dead', () => {
    const blink = readyBlinkStates(['fill', 'wash', 'rinse', 'spin'], 5, 0.9);
    const capture = record(
      [dark(0.5), ...blink, dark(0.3), ...code(8, 1, same(8)), dark(0.7)],
      { lamps: LAMPS, sampleRateHz: 100, scaleMax: 1023, noise: 0.01 },
      seededRandom(3),
    );
    const answer = decode(capture);
    expect(answer.segments[0]?.kind).toBe('ready');
    expect(answer.deadLamps).toEqual([]);
    expect(stated(answer)).toEqual(['G8K1 4']);
  });

  test('When phases take turns like a ready blink but longer, then they are a code', () => {
    // All lamps but Drain together, 0.8 s each: a period of 1.6 s, above the 1.4 s of the sheet.
    expect(stated(decode(play(code(7, 0, same(10, 0.8)))))).toEqual(['G7K0 5']);
  });
});

describe('what is no code', () => {
  test.each([
    ['faster', 0.3, /faster than the sheet allows/],
    ['slower', 4, /longer than the sheet allows/],
  ])('When phases are %s than the sheet allows, then the reason says so', (_, phaseS, reason) => {
    const answer = decode(play(code(5, 3, same(8, phaseS))));
    expect(answer.codes).toEqual([]);
    expect(reasons(answer)).toMatch(reason);
  });

  test('When the lamps add up to more than 9, then the sum is named', () => {
    const on = { seconds: PHASE_S, lit: ['spin', 'drain', 'rinse', 'fill'] };
    const off = { seconds: PHASE_S, lit: ['wash', 'fill'] };
    const answer = decode(play([on, off, on, off, on, off, on, off]));
    expect(answer.codes).toEqual([]);
    expect(reasons(answer)).toMatch(/add up to 13 while the selector is lit/);
  });

  test('When the code was not seen whole, then the reason asks for more', () => {
    const answer = decode(
      record(
        [dark(0.5), ...ready, dark(0.3), ...code(5, 3, [1.2, 0.6])],
        { lamps: LAMPS, sampleRateHz: 100, scaleMax: 1023 },
        seededRandom(5),
      ),
    );
    expect(answer.codes).toEqual([]);
    expect(reasons(answer)).toMatch(/not seen whole/);
    expect(answer.segments.at(-1)).toMatchObject({ kind: 'unreadable' });
  });

  test('When one digit is shown and then nothing, then the capture is not without a code', () => {
    const answer = decode(play([...code(4, 0, [PHASE_S]), dark(6)]));
    expect(answer.codes).toEqual([]);
    expect(answer.segments.map(({ kind }) => kind)).toContain('unreadable');
  });
});

describe('a poor view of the lamps', () => {
  const amplitude = { fill: 0.75, wash: 0.7, rinse: 0.25, drain: 0.25, spin: 0.7, lock: 0.8 };

  test('When a lamp is dim beside bright ones, then the code is read and the lamp named', () => {
    const answer = decode(play(code(4, 8, same(8)), { amplitude, glow: 0.06 }));
    expect(stated(answer)).toEqual(['G4K8 4']);
    expect(answer.warnings.join('\n')).toMatch(/lamp 'drain' reads at (2[5-9]|3[0-9]) % of full scale/);
  });

  test.each([50, 99, 100, 200])(
    'When light is noisy, drifts and flickers at %i samples a second, then the code is read',
    (sampleRateHz) => {
      const light = {
        sampleRateHz,
        noise: 0.04,
        ambientDrift: 0.12,
        gainDrift: -0.25,
        flicker: { share: 0.1, hertz: 100 },
        loss: 0.05,
        riseS: 0.025,
      };
      expect(stated(decode(play([...code(6, 9, same(10)), ...code(1, 8, same(10))], light)))).toEqual(['G6K9 5', 'G1K8 5']);
    },
  );

  test('When noise hides a weak lamp, then that lamp is named and nothing is guessed', () => {
    const answer = decode(
      play(code(6, 5, same(8)), { amplitude: { ...amplitude, fill: 0.08, rinse: 0.6, drain: 0.6 }, noise: 0.12, sampleRateHz: 50 }),
    );
    expect(answer.codes).toEqual([]);
    expect(reasons(answer)).toMatch(/'fill'/);
  });

  test('When ambient light swells and ebbs, then a dark lamp is not taken for a lit one', () => {
    const capture = play(code(4, 1, same(10)));
    for (const lane of capture.levels) lane.forEach((level, sample) => (lane[sample] = Math.max(0, level + 50 * Math.sin(sample / 64))));
    expect(stated(decode(capture))).toEqual(['G4K1 5']);
  });

  test('When single samples are wild, then nothing changes', () => {
    const capture = play(code(3, 6, same(10)));
    for (let sample = 37; sample < capture.timesUs.length; sample += 101) {
      capture.levels.forEach((lane, column) => (lane[sample] = (sample + column) % 2 === 0 ? 0 : 1023));
    }
    expect(stated(decode(capture))).toEqual(['G3K6 5']);
  });
});

describe('another sheet', () => {
  const overlapping: Sheet = {
    ...heron,
    ready: { lamps: ['fill', 'wash', 'rinse', 'spin'], periodS: [1.2, 3] },
    coding: { ...heronCoding, weights: { fill: 1, wash: 2, rinse: 4 }, maxDigit: 7, phaseS: [0.6, 1.6] },
  };

  test('When ready blink and coding share their times, then lamps in unison are the ready blink', () => {
    const blink = readyBlinkStates(['fill', 'wash', 'rinse', 'spin'], 4, 2);
    const states = [dark(0.5), ...blink, dark(0.3), ...code(5, 2, same(8, 1)), dark(0.7)];
    const answer = decode(record(states, { lamps: LAMPS, sampleRateHz: 100, scaleMax: 1023, noise: 0.01 }, seededRandom(9)), overlapping);
    expect(answer.segments.map(({ kind }) => kind)).toEqual(['ready', 'code']);
    expect(stated(answer)).toEqual(['G5K2 4']);
  });

  test('When the sheet has no ready blink, then a code whose lamps were all seen lit is stated', () => {
    const { ready: _, ...without } = heron;
    const states = [dark(0.5), ...code(9, 6, same(8)), dark(0.7)];
    expect(stated(decode(record(states, { lamps: LAMPS, sampleRateHz: 100, scaleMax: 1023 }, seededRandom(9)), without))).toEqual([
      'G9K6 4',
    ]);
  });
});

describe('the confidence asked for', () => {
  test('When less is asked for, then a likely code is stated', () => {
    const capture = record(
      [dark(0.6), ...code(1, 6, same(8)), dark(0.7)],
      { lamps: LAMPS, sampleRateHz: 100, scaleMax: 1023 },
      seededRandom(2),
    );
    expect(decodeCapture(capture, heron).codes).toEqual([]);
    // 0.5 % that Drain is burnt out: 1 / 1.005, rounded down.
    expect(decodeCapture(capture, heron, { minConfidence: 0.99 }).codes).toEqual([{ code: 'G1K6', repeats: 4, confidence: 0.9949 }]);
  });
});
