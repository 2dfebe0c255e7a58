import { describe, expect, test } from 'vitest';
import { decodeCapture, isReadable } from '../../../shared/decode/decode-capture.js';
import { BadInputError, NotYetError } from '../../../shared/errors.js';
import { readCapture } from '../../../shared/lamps/read-capture.js';
import { readSheet } from '../../../shared/sheet/read-sheet.js';
import { expectAnswer, type ExampleCase } from '../../helpers/compare-answer.js';
import { exampleText, heron } from '../../helpers/fixtures.js';

// Expected values: examples/decode.json, the contract's exact answers.
const { cases } = JSON.parse(exampleText('decode.json')) as { cases: ExampleCase[] };
const readable = cases.filter((example) => example.sheet === 'heron-h6.yaml' && example.error === undefined);
const bad = cases.filter((example) => example.error !== undefined);
const otherCodings = cases.filter((example) => example.sheet !== 'heron-h6.yaml');

describe('the examples of the contract', () => {
  test.each(readable)('When $file is decoded ($says), then the answer is as listed', (example) => {
    const answer = decodeCapture(readCapture(exampleText(example.file), example.file), heron);
    expectAnswer(answer, example);
    expect(isReadable(answer) ? 0 : 1).toBe(example.exit);
  });

  test.each(bad)('When $file is read ($says), then the line at fault is named', (example) => {
    try {
      readCapture(exampleText(example.file), example.file);
      expect.unreachable('bad input must be refused');
    } catch (error) {
      expect(error).toBeInstanceOf(BadInputError);
      expect((error as BadInputError).line).toBe(example.error?.line);
      expect((error as BadInputError).file).toBe(example.file);
      expect((error as BadInputError).message).not.toBe('');
    }
  });

  test.each(otherCodings)('When $file needs a coding that is not read yet, then it says so instead of guessing', (example) => {
    const sheet = readSheet(exampleText(example.sheet), example.sheet);
    const capture = readCapture(exampleText(example.file), example.file);
    expect(() => decodeCapture(capture, sheet)).toThrow(NotYetError);
    expect(() => decodeCapture(capture, sheet)).toThrow(/cannot decode (flash-count|steady-pattern) sheets yet/);
  });
});
