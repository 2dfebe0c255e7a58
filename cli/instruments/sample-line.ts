import { xorChecksum } from '../../shared/measure/checksum.js';

/** One line of the probe (contract, section 6): its own clock in microseconds, modulo 2^32, and a level a sensor. */
export interface ProbeSample {
  tUs: number;
  levels: number[];
}

const SAMPLE_LINE = /^\$(?<body>\d{1,10}(?:,\d{1,7})+)\*(?<check>[0-9a-fA-F]{2})$/;
/** The probe's clock has 32 bits. */
export const PROBE_CLOCK_SPAN_US = 2 ** 32;

/** Whether a line is meant to be a sample, damaged or not. */
export const isSampleLine = (line: string): boolean => line.startsWith('$');

/** Reads a sample line; undefined for one that is damaged: a wrong checksum, a wrong number of levels, a level off the scale. */
export function parseSampleLine(line: string, sensorCount: number, scaleMax: number): ProbeSample | undefined {
  const parts = SAMPLE_LINE.exec(line)?.groups;
  const body = parts?.['body'];
  if (body === undefined || xorChecksum(body) !== parts?.['check']?.toUpperCase()) return undefined;
  const [tUs = NaN, ...levels] = body.split(',').map(Number);
  if (levels.length !== sensorCount || levels.some((level) => level > scaleMax) || tUs >= PROBE_CLOCK_SPAN_US) return undefined;
  return { tUs, levels };
}

/** Writes a sample line, as the probe does. */
export function writeSampleLine({ tUs, levels }: ProbeSample): string {
  const body = [tUs % PROBE_CLOCK_SPAN_US, ...levels].join(',');
  return `$${body}*${xorChecksum(body)}`;
}
