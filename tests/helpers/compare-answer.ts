import { expect } from 'vitest';
import type { DecodeAnswer, Segment } from '../../shared/decode/answer.js';

/** One case of examples/decode.json; how closely each part is compared stands in that file's `about`. */
export interface ExampleCase {
  file: string;
  sheet: string;
  says: string;
  exit: number;
  codes?: { code: string; repeats?: number }[];
  segments?: { kind: Segment['kind']; fromS?: number; toS: number; code?: string; digits?: Record<string, number>; repeats?: number }[];
  deadLamps?: string[];
  cut?: boolean;
  lost?: number;
  candidates?: string[];
  warningAbout?: string;
  error?: { line: number };
}

const EDGE_TOLERANCE_S = 0.5;
const LEAST_CONFIDENCE = 0.999;

/** Compares an answer with a case as its `about` says: times within 0.5 s, stated confidence at least 0.999, candidates among those listed. */
export function expectAnswer(answer: DecodeAnswer, example: ExampleCase): void {
  expect(answer.codes.map(({ code, repeats }) => ({ code, repeats }))).toEqual(
    example.codes?.map(({ code, repeats }) => ({ code, repeats })),
  );
  for (const { confidence } of answer.codes) expect(confidence).toBeGreaterThanOrEqual(LEAST_CONFIDENCE);
  expect(answer.deadLamps).toEqual(example.deadLamps);
  expect(answer.cut).toBe(example.cut);
  expect(answer.lost).toBe(example.lost);
  const named = answer.segments.filter((segment) => segment.kind !== 'dark' || segment.toS - segment.fromS > 2.5);
  expect(named.map((segment) => segment.kind)).toEqual(example.segments?.map((segment) => segment.kind));
  example.segments?.forEach((wanted, index) => {
    const segment = named[index] as Segment;
    if (wanted.fromS !== undefined) expect(Math.abs(segment.fromS - wanted.fromS)).toBeLessThanOrEqual(EDGE_TOLERANCE_S);
    expect(Math.abs(segment.toS - wanted.toS)).toBeLessThanOrEqual(EDGE_TOLERANCE_S);
    if (segment.kind === 'code') {
      expect({ code: segment.code, digits: segment.digits, repeats: segment.repeats }).toEqual({
        code: wanted.code,
        digits: wanted.digits,
        repeats: wanted.repeats,
      });
    }
    if (segment.kind === 'unreadable' && example.candidates !== undefined) {
      expect(segment.candidates.length).toBeGreaterThan(0);
      for (const { code } of segment.candidates) expect(example.candidates).toContain(code);
    }
  });
  if (example.warningAbout !== undefined) expect(answer.warnings.join('\n')).toContain(example.warningAbout);
  expectInOrder(answer);
}

/** Segments stand in time order, inside the file, and don't overlap (contract, section 3). */
export function expectInOrder(answer: DecodeAnswer): void {
  let reachedS = 0;
  for (const { fromS, toS } of answer.segments) {
    expect(fromS).toBeGreaterThanOrEqual(reachedS);
    expect(toS).toBeGreaterThan(fromS);
    reachedS = toS;
  }
}
