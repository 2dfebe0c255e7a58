/**
 * Says whether a received header is the one that a pattern describes, in its long or its short form.
 *
 * In the pattern the capitals are the short form, `[...]` may be left out. Case of the input does not matter; only the exact
 * long or the exact short form of a word counts. A leading colon is allowed except before a common command (`*IDN?`).
 * Source: SCPI-99 volume 1, 6.2.
 *
 * @example scpiHeaderMatches('MEASure[:SCALar]:CURRent[:DC]?', 'meas:curr?') // true
 * @example scpiHeaderMatches('MEASure[:SCALar]:CURRent[:DC]?', 'MEAS:DC?') // false
 */
export function scpiHeaderMatches(pattern: string, header: string): boolean {
  const body = pattern.replace(/[A-Za-z]+|\[|\]|[*?:]/g, (part) => {
    if (part === '[') return '(?:';
    if (part === ']') return ')?';
    if (part === '*' || part === '?') return `\\${part}`;
    if (part === ':') return ':';
    return `(?:${part}|${part.replace(/[a-z]+$/, '')})`;
  });
  const colon = pattern.startsWith('*') || pattern.startsWith(':') ? '' : ':?';
  return new RegExp(`^${colon}${body}$`, 'i').test(header);
}
