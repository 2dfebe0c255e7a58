import type { CaptureHeader } from './capture.js';

/** The first line of a capture file, with its LF. Keys keep the order given. */
export function headerLine(header: CaptureHeader): string {
  return `${JSON.stringify(header)}\n`;
}

/**
 * One sample line: the time in whole microseconds since the start, then one level a lamp in the header's order.
 *
 * @example sampleLine(10000, [12, 900]) // '[10000,12,900]\n'
 */
export function sampleLine(timeUs: number, levels: readonly number[]): string {
  return `[${[timeUs, ...levels].join(',')}]\n`;
}

/**
 * A key press of the technician; `next` says that the next code was brought up.
 *
 * @example markLine(20500000, 'next') // '{"mark":20500000,"label":"next"}\n'
 */
export function markLine(timeUs: number, label: string): string {
  return `${JSON.stringify({ mark: timeUs, label })}\n`;
}

/** So many probe lines failed their checksum or never came, at this time. */
export function gapLine(lost: number, timeUs: number): string {
  return `${JSON.stringify({ lost, at: timeUs })}\n`;
}

/** The last line; a file without it was cut short. */
export function endLine(timeUs: number): string {
  return `${JSON.stringify({ end: timeUs })}\n`;
}
