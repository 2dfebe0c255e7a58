import type { Capture } from './capture.js';

/** A stretch of a capture without samples, in seconds since its start. */
export interface CaptureHole {
  fromS: number;
  toS: number;
}

/** Edges are told within this (contract, section 3); where nothing was seen for longer, they can't be. */
const LEAST_HOLE_SECONDS = 0.5;

/**
 * Where nothing was seen: stretches of more than 0.5 s without a sample, the end of the capture included.
 *
 * Takes a capture; gives holes in the order of time, in seconds. By keys a level holds until the next one: there are no holes then.
 * Assumes that times rise, as a capture's do; refuses nothing.
 *
 * @example holesOf(capture) // [{ fromS: 12.01, toS: 16.4 }] where the probe was unplugged for four seconds
 */
export function holesOf({ header, timesUs, endUs }: Pick<Capture, 'header' | 'timesUs' | 'endUs'>): CaptureHole[] {
  if (header.source === 'keys') return [];
  const holes: CaptureHole[] = [];
  let lastUs = 0;
  for (const timeUs of endUs === undefined ? timesUs : [...timesUs, endUs]) {
    if (timeUs - lastUs > LEAST_HOLE_SECONDS * 1_000_000) holes.push({ fromS: lastUs / 1_000_000, toS: timeUs / 1_000_000 });
    lastUs = timeUs;
  }
  return holes;
}
