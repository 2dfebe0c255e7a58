import fc from 'fast-check';
import { expect, test } from 'vitest';
import { LineSplitter, LONGEST_LINE } from '../../../cli/instruments/line-splitter.js';

const bytes = (text: string): Buffer => Buffer.from(text, 'latin1');

test('When lines come whole, with LF or CR LF, then each is handed on without its end', () => {
  expect(new LineSplitter().push(bytes('one\ntwo\r\n\r\nthree\n'))).toEqual(['one', 'two', 'three']);
});

test('When the same bytes come in any pieces, then the lines are the same', () => {
  const text = '+8.40000000E+00\r\n$120,5,6*0F\n0,"No error"\r\n';
  fc.assert(
    fc.property(fc.array(fc.nat(text.length), { maxLength: 8 }), (cuts) => {
      const splitter = new LineSplitter();
      const edges = [0, ...cuts.sort((one, other) => one - other), text.length];
      const lines = edges.slice(1).flatMap((edge, index) => splitter.push(bytes(text.slice(edges[index], edge))));
      expect(lines).toEqual(['+8.40000000E+00', '$120,5,6*0F', '0,"No error"']);
    }),
  );
});

test('When NULs stand before or behind a line, then they are dropped and counted', () => {
  const splitter = new LineSplitter();
  expect(splitter.push(bytes('\0\0+1.5\0\n'))).toEqual(['+1.5']);
  expect(splitter.droppedBytes).toBe(3);
});

test('When a NUL stands where a digit was, then the line does not become another number', () => {
  expect(new LineSplitter().push(bytes('1\x002.5\n'))).toEqual(['1\x002.5']);
});

test('When a line never ends, then it is given up at the limit, counted, and the next line is found', () => {
  const splitter = new LineSplitter();
  const lines = [];
  for (let kilobyte = 0; kilobyte < 100; kilobyte += 1) lines.push(...splitter.push(bytes('x'.repeat(1000))));
  lines.push(...splitter.push(bytes('x\n+2.0\n')));
  expect(lines).toEqual(['+2.0']);
  expect(splitter.droppedBytes).toBe(100_001);
  expect(splitter.droppedLines).toBe(1);
});

test('When a line is as long as allowed, then it is kept; one byte more and it is dropped whole', () => {
  const splitter = new LineSplitter();
  expect(splitter.push(bytes(`${'y'.repeat(LONGEST_LINE)}\n`))).toEqual(['y'.repeat(LONGEST_LINE)]);
  expect(splitter.push(bytes(`${'y'.repeat(LONGEST_LINE + 1)}\ngood\n`))).toEqual(['good']);
});
