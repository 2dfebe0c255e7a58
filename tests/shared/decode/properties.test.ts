import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { decodeAnswerSchema } from '../../../shared/decode/answer.js';
import { decodeCapture } from '../../../shared/decode/decode-capture.js';
import { viewCapture } from '../../../shared/decode/view-capture.js';
import { BadInputError } from '../../../shared/errors.js';
import type { Capture } from '../../../shared/lamps/capture.js';
import { readCapture } from '../../../shared/lamps/read-capture.js';
import { expectInOrder } from '../../helpers/compare-answer.js';
import { exampleText, heron } from '../../helpers/fixtures.js';

const LAMPS = ['fill', 'wash', 'rinse', 'drain', 'spin', 'lock'];

describe('any capture at all', () => {
  test('When levels and times are arbitrary, then there is an answer of the schema, in order, without NaN', () => {
    const sample = fc.tuple(
      fc.integer({ min: 0, max: 3_000_000 }),
      fc.array(fc.integer({ min: 0, max: 1023 }), { minLength: 6, maxLength: 6 }),
    );
    fc.assert(
      fc.property(
        fc.array(sample, { maxLength: 300 }),
        fc.constantFrom('probe' as const, 'keys' as const, 'clip' as const),
        fc.array(fc.nat(60_000_000), { maxLength: 4 }),
        fc.option(fc.nat(100_000_000), { nil: undefined }),
        (steps, source, marks, endUs) => {
          let timeUs = 0;
          const capture: Capture = {
            header: {
              format: 'refettle.lamps',
              version: 1,
              capturedAt: '2026-03-03T10:42:00Z',
              source,
              lamps: LAMPS,
              scale: { unit: 'counts', max: 1023 },
            },
            timesUs: steps.map(([stepUs]) => (timeUs += stepUs)),
            levels: LAMPS.map((_, lamp) => steps.map(([, levels]) => levels[lamp] ?? 0)),
            marks: marks.map((atUs) => ({ atUs, label: 'next' })),
            gaps: [],
            ...(endUs === undefined ? {} : { endUs }),
            cut: endUs === undefined,
          };
          const answer = decodeCapture(capture, heron);
          expect(decodeAnswerSchema.safeParse(answer).success).toBe(true);
          expectInOrder(answer);
          viewCapture(capture, heron);
        },
      ),
      { seed: 20260304, numRuns: 300 },
    );
  });

  test('When times reach the end of numbers, then the answer comes at once', () => {
    const far = Number.MAX_SAFE_INTEGER;
    const text = exampleText('captures/61-no-header.lamps.ndjson');
    const header = exampleText('captures/01-one-code.lamps.ndjson').split('\n')[0] ?? '';
    const first = text.split('\n')[0] ?? '';
    const capture = readCapture(`${header}\n${first}\n[${far},1,2,3,4,5,6]\n{"end":${far}}\n`);
    const answer = decodeCapture(capture, heron);
    expect(answer.durationS).toBeCloseTo(far / 1e6, 3);
  });

  test('When any text is decoded as a capture, then it gives an answer or a BadInputError', () => {
    const header = exampleText('captures/01-one-code.lamps.ndjson').split('\n')[0] ?? '';
    fc.assert(
      fc.property(
        fc.array(fc.oneof(fc.constantFrom('[0,1,2,3,4,5,6]', '[5000000,900,1,1,1,900,1]', '{"end":9000000}'), fc.string()), {
          maxLength: 8,
        }),
        (lines) => {
          try {
            expectInOrder(decodeCapture(readCapture([header, ...lines].join('\n')), heron));
          } catch (error) {
            expect(error).toBeInstanceOf(BadInputError);
          }
        },
      ),
      { seed: 20260305, numRuns: 300 },
    );
  });
});

describe('columns go by id', () => {
  const original = readCapture(exampleText('captures/02-two-codes.lamps.ndjson'));

  test('When columns are permuted with the header, then the answer is the same', () => {
    const expected = decodeCapture(original, heron);
    fc.assert(
      fc.property(fc.shuffledSubarray([0, 1, 2, 3, 4, 5], { minLength: 6 }), (order) => {
        const permuted: Capture = {
          ...original,
          header: { ...original.header, lamps: order.map((column) => original.header.lamps[column] ?? '') },
          levels: order.map((column) => original.levels[column] ?? []),
        };
        expect(decodeCapture(permuted, heron)).toEqual(expected);
      }),
      { seed: 20260306, numRuns: 20 },
    );
  });

  test('When a capture is decoded twice, then nothing has changed, the capture neither', () => {
    const before = structuredClone(original);
    expect(decodeCapture(original, heron)).toEqual(decodeCapture(original, heron));
    expect(original).toEqual(before);
  });

  test('When a lamp outside the coding is missing, then the codes are read all the same', () => {
    const without: Capture = {
      ...original,
      header: { ...original.header, lamps: original.header.lamps.slice(0, 5) },
      levels: original.levels.slice(0, 5),
    };
    expect(decodeCapture(without, heron).codes.map(({ code }) => code)).toEqual(['G5K3', 'G2K9']);
  });

  test('When two lamps of the coding are missing, then both are named', () => {
    const without: Capture = {
      ...original,
      header: { ...original.header, lamps: ['rinse', 'drain', 'spin', 'lock'] },
      levels: original.levels.slice(2),
    };
    const [segment] = decodeCapture(without, heron).segments;
    expect(segment).toMatchObject({ kind: 'unreadable', fromS: 0, candidates: [] });
    expect(segment?.kind === 'unreadable' ? segment.reason : '').toMatch(/'fill', 'wash'/);
  });

  test('When the header names another family, then a warning says so', () => {
    const other: Capture = { ...original, header: { ...original.header, family: 'wren-w3' } };
    expect(decodeCapture(other, heron).warnings.join('\n')).toMatch(/family 'wren-w3'/);
  });
});
