import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { BadInputError } from '../../../shared/errors.js';
import { readCapture } from '../../../shared/lamps/read-capture.js';
import { endLine, gapLine, headerLine, markLine, sampleLine } from '../../../shared/lamps/write-capture.js';

// Rules and their outcomes: contract, section 1.
const HEADER =
  '{"format":"refettle.lamps","version":1,"capturedAt":"2026-03-03T10:42:00Z","source":"probe","lamps":["fill","wash"],"scale":{"unit":"counts","max":1023}}';
const file = (...lines: string[]): string => [HEADER, ...lines, ''].join('\n');

function faultOf(text: string): { line: number | undefined; reason: string } {
  try {
    readCapture(text, 'a.lamps.ndjson');
  } catch (error) {
    if (error instanceof BadInputError) return { line: error.line, reason: error.message };
    throw error;
  }
  throw new Error('nothing was refused');
}

describe('a whole capture', () => {
  test('When every kind of line is there, then all of it is in memory by column', () => {
    const capture = readCapture(
      file('[0,1,2]', '{"ambientC":21.5}', '[10000,3,4.5]', '{"mark":9000,"label":"next"}', '{"lost":3,"at":5000}', '{"end":20000}'),
    );
    expect(capture.timesUs).toEqual([0, 10000]);
    expect(capture.levels).toEqual([
      [1, 3],
      [2, 4.5],
    ]);
    expect(capture.marks).toEqual([{ atUs: 9000, label: 'next' }]);
    expect(capture.gaps).toEqual([{ atUs: 5000, lost: 3 }]);
    expect(capture).toMatchObject({ endUs: 20000, cut: false });
  });

  test('When marks and gaps stand late and out of order, then they are taken as they are', () => {
    const capture = readCapture(
      file(
        '[0,1,2]',
        '[90000,1,2]',
        '{"mark":50000,"label":"next"}',
        '{"mark":10000,"label":"next"}',
        '{"lost":1,"at":1}',
        '{"end":90000}',
      ),
    );
    expect(capture.marks.map((mark) => mark.atUs)).toEqual([50000, 10000]);
  });

  test('When two samples have the same time, then that is no fall', () => {
    expect(readCapture(file('[5,1,2]', '[5,1,2]', '{"end":5}')).timesUs).toEqual([5, 5]);
  });

  test('When lines end in CR LF after a byte order mark, then the capture reads the same', () => {
    const plain = file('[0,1,2]', '{"end":20000}');
    expect(readCapture('\uFEFF' + plain.replaceAll('\n', '\r\n'))).toEqual(readCapture(plain));
  });

  test('When a capture is written and read again, then nothing has changed', () => {
    const first = readCapture(file('[0,1,2]', '[10000,3,4]', '{"mark":9000,"label":"next"}', '{"lost":3,"at":5000}', '{"end":20000}'));
    const text = [
      headerLine(first.header),
      ...first.timesUs.map((timeUs, sample) =>
        sampleLine(
          timeUs,
          first.levels.map((lane) => lane[sample] ?? 0),
        ),
      ),
      ...first.marks.map((mark) => markLine(mark.atUs, mark.label)),
      ...first.gaps.map((gap) => gapLine(gap.lost, gap.atUs)),
      endLine(first.endUs ?? 0),
    ].join('');
    expect(readCapture(text)).toEqual(first);
  });
});

describe('a capture that was cut short', () => {
  test('When the end line is missing, then the capture is cut', () => {
    expect(readCapture(file('[0,1,2]'))).toMatchObject({ cut: true, timesUs: [0] });
  });

  test('When the last line has no LF and is whole, then it counts', () => {
    expect(readCapture(`${HEADER}\n[0,1,2]\n[10000,3,4]`)).toMatchObject({ cut: true, timesUs: [0, 10000] });
    expect(readCapture(`${HEADER}\n[0,1,2]\n{"end":10000}`)).toMatchObject({ cut: false, endUs: 10000 });
  });

  test.each(['[10000,3', '[10000,3,', '{"end":1', '{"mark":12', '['])(
    'When the last line is only "%s", then what stands before it is read',
    (half) => {
      expect(readCapture(`${HEADER}\n[0,1,2]\n${half}`)).toMatchObject({ cut: true, timesUs: [0] });
    },
  );

  test('When the last line without LF is whole JSON but wrong, then it is refused', () => {
    expect(faultOf(`${HEADER}\n[0,1,2]\n[10000,3]`).line).toBe(3);
  });
});

describe('bad input', () => {
  test.each([
    ['an empty file', '', 1, /empty/],
    ['only a byte order mark', '\uFEFF', 1, /empty/],
    ['half a header', HEADER.slice(0, 40), 1, /no JSON/],
    ['a sample first', '[0,1,2]\n', 1, /no capture header/],
    ['another format', HEADER.replace('refettle.lamps', 'other.lamps') + '\n', 1, /format/],
    ['another version', HEADER.replace('"version":1', '"version":2') + '\n', 1, /version 2/],
    ['a lamp id twice', HEADER.replace('"wash"', '"fill"') + '\n', 1, /twice/],
    ['no lamps', HEADER.replace('["fill","wash"]', '[]') + '\n', 1, /lamps/],
    ['a scale of nothing', HEADER.replace('1023', '0') + '\n', 1, /scale/],
    ['an unknown source', HEADER.replace('probe', 'guess') + '\n', 1, /source/],
    ['a local time', HEADER.replace('10:42:00Z', '10:42:00') + '\n', 1, /capturedAt/],
    ['a level too few', file('[0,1,2]', '[10,1]'), 3, /1 levels/],
    ['a level too many', file('[0,1,2,3]'), 2, /3 levels/],
    ['an empty list', file('[]'), 2, /0 levels/],
    ['a time that falls', file('[20,1,2]', '[10,1,2]'), 3, /falls from 20 to 10/],
    ['a negative time', file('[-1,1,2]'), 2, /negative/],
    ['a broken microsecond', file('[0.5,1,2]'), 2, /whole number of microseconds/],
    ['a time as text', file('["0",1,2]'), 2, /whole number of microseconds/],
    ['a level above the scale', file('[0,1,1024]'), 2, /'wash' is 1024/],
    ['a level below zero', file('[0,-1,2]'), 2, /'fill' is -1/],
    ['a level as text', file('[0,"1",2]'), 2, /'fill' is no number/],
    ['a level that is null', file('[0,null,2]'), 2, /'fill' is no number/],
    ['a level without bounds', file('[0,1e999,2]'), 2, /'fill' is no number/],
    ['a blank line', file('[0,1,2]', '', '{"end":10}'), 3, /blank/],
    ['a line of blanks', file('[0,1,2]', '  ', '{"end":10}'), 3, /blank/],
    ['a blank line after the last', file('[0,1,2]', '{"end":10}', ''), 4, /after the end/],
    ['a sample after the end', file('[0,1,2]', '{"end":10}', '[20,1,2]'), 4, /after the end/],
    ['half a line after the end', file('[0,1,2]', '{"end":10}') + '[20', 4, /after the end/],
    ['a line that is no JSON', file('[0,1,2]', 'lit', '{"end":10}'), 3, /no JSON/],
    ['a line that is a number', file('7'), 2, /neither/],
    ['an end that is no time', file('{"end":"soon"}'), 2, /end line/],
    ['a mark without a label', file('{"mark":10}'), 2, /label/],
    ['a gap of half a line', file('{"lost":0.5,"at":1}'), 2, /lost/],
  ])('When there is %s, then line and reason are named', (_, text, line, reason) => {
    const fault = faultOf(text);
    expect(fault.line).toBe(line);
    expect(fault.reason).toMatch(reason);
  });

  test('When any text is read, then it gives a capture or a BadInputError with a line', () => {
    const anyLine = fc.oneof(
      fc.constantFrom('', '[0,1,2]', '{"end":10}', '[10,1023,0]', '{"lost":1,"at":0}', '{"mark":1,"label":"next"}', '{}', '[', '\r'),
      fc.string(),
      fc.json(),
    );
    fc.assert(
      fc.property(fc.boolean(), fc.array(anyLine), fc.constantFrom('\n', '\r\n'), (withHeader, lines, lineEnd) => {
        const text = [...(withHeader ? [HEADER] : []), ...lines].join(lineEnd);
        try {
          const capture = readCapture(text);
          expect(capture.levels.every((lane) => lane.length === capture.timesUs.length)).toBe(true);
        } catch (error) {
          expect(error).toBeInstanceOf(BadInputError);
          expect((error as BadInputError).line).toBeGreaterThanOrEqual(1);
        }
      }),
      { seed: 20260303, numRuns: 500 },
    );
  });
});
