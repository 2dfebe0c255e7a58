import { crc32 } from 'node:zlib';
import { parseJson } from '../session.js';

/** CRC-32 as zlib, Ethernet and PNG have it (ISO/IEC 13239); eight hex digits. */
export const checksumOf = (text: string): string => crc32(text).toString(16).padStart(8, '0');

/** How the files of before there were checksums begin. */
const PLAIN_BEGINS = '{"run":';
const LINE = /^\{"crc32":"([0-9a-f]{8})",("n":(\d+),"line":(.*))\}$/s;

/** One line of a file that only grows, with its number in the file and a checksum over both. It stays JSON. */
export function checkedLine(number: number, value: unknown): string {
  const text = `"n":${number},"line":${JSON.stringify(value)}`;
  return `{"crc32":"${checksumOf(text)}",${text}}\n`;
}

export type CheckedLine = { number: number; value: unknown } | { number: number; wrong: string; torn: boolean; whole?: unknown };

/**
 * The lines of such a file. One that does not hold together says what is wrong with it; `torn` is the end of a file that was being
 * written when the power went; `whole` is what a line says that is sound in itself and stands in the wrong place. Files of before there were checksums have plain JSON in each line.
 */
export function readCheckedLines(text: string): CheckedLine[] {
  const lines = text.split('\n');
  const endsWhole = lines.at(-1) === '';
  if (endsWhole) lines.pop();
  const plain = lines[0]?.startsWith(PLAIN_BEGINS) === true;
  return lines.map((line, index) => {
    const number = index + 1;
    const torn = !endsWhole && number === lines.length;
    const [, sum, covered, written, json] = LINE.exec(line) ?? [];
    if (sum === undefined || covered === undefined || json === undefined) {
      const value = plain ? parseJson(line) : undefined;
      return value === undefined
        ? { number, torn, wrong: torn ? 'it was cut off while it was written' : 'it is no line of a journal' }
        : { number, value };
    }
    if (checksumOf(covered) !== sum) return { number, torn, wrong: 'its checksum is wrong' };
    if (Number(written) !== number)
      return {
        number,
        torn: false,
        wrong: `it was written as line ${written ?? ''}: lines are missing, or stand twice`,
        whole: parseJson(json),
      };
    return { number, value: parseJson(json) };
  });
}
