// A stray console.error or console.warn is a defect: somebody would read it on a bench and not know what to do.
import { afterEach, beforeEach, expect, vi } from 'vitest';

beforeEach(() => {
  vi.spyOn(console, 'error');
  vi.spyOn(console, 'warn');
});
afterEach(() => {
  const stray = [...vi.mocked(console.error).mock.calls, ...vi.mocked(console.warn).mock.calls];
  vi.restoreAllMocks();
  expect(stray).toEqual([]);
});
