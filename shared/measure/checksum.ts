/**
 * The check of a serial line: all its bytes combined by exclusive or, as two hexadecimal digits, high one first.
 *
 * `text` is what stands between `$` and `*`, neither included, one byte a character. Source: contract, section 6 (the form of NMEA 0183).
 *
 * @example xorChecksum('PSRF103,00,01,00,01') // '25'
 */
export function xorChecksum(text: string): string {
  let check = 0;
  for (let index = 0; index < text.length; index += 1) check ^= text.charCodeAt(index) & 0xff;
  return check.toString(16).toUpperCase().padStart(2, '0');
}
