/** One entry of an instrument's error queue. `number` 0 means that the queue is empty. */
export interface ScpiError {
  number: number;
  text: string;
  /** What the instrument adds about this very case. */
  info: string | undefined;
}

const ERROR_ENTRY = /^\s*(?<number>[+-]?\d+)\s*,\s*"(?<quoted>(?:[^"]|"")*)"\s*$/;

/**
 * Reads the answer to `SYSTem:ERRor?`: a number, a text in quotes, and behind a semicolon what the instrument adds.
 *
 * An answer that is no such entry gives `undefined`. Source: SCPI-99 volume 2, SYSTem:ERRor.
 *
 * @example parseScpiError('-113,"Undefined header;ABCD"') // { number: -113, text: 'Undefined header', info: 'ABCD' }
 * @example parseScpiError('+0,"No error"') // { number: 0, text: 'No error', info: undefined }
 */
export function parseScpiError(text: string): ScpiError | undefined {
  const parts = ERROR_ENTRY.exec(text)?.groups;
  if (parts?.['number'] === undefined || parts['quoted'] === undefined) return undefined;
  const [message = '', ...info] = parts['quoted'].replaceAll('""', '"').split(';');
  return { number: Number(parts['number']), text: message, info: info.length === 0 ? undefined : info.join(';') };
}
