/** Who an instrument says it is. An empty text or `undefined` where it does not say. */
export interface Identification {
  maker: string;
  model: string;
  serial: string | undefined;
  firmware: string | undefined;
  /** Fields beyond the four of the standard. */
  extra: string[];
  /** Four fields and no header echo, as IEEE 488.2 asks. */
  wellFormed: boolean;
}

const HEADER_ECHO = /^\s*\*IDN\??\s+/i;

/**
 * Reads the answer to `*IDN?`: maker, model, serial number and firmware level, separated by commas.
 *
 * A serial or firmware of `0` means "not available" and comes back as `undefined`. Real instruments deviate (an echo of the
 * header, five fields, too few): they are read as far as possible and marked not `wellFormed`; nothing is refused.
 * Source: IEEE 488.2, 10.14.
 *
 * @example parseIdentification('Millrace,BM-4,0,1.0') // { maker: 'Millrace', model: 'BM-4', serial: undefined, firmware: '1.0', extra: [], wellFormed: true }
 */
export function parseIdentification(text: string): Identification {
  const echoed = HEADER_ECHO.test(text);
  const fields = text
    .replace(HEADER_ECHO, '')
    .split(',')
    .map((field) => field.trim());
  const [maker = '', model = '', serial, firmware, ...extra] = fields;
  return { maker, model, serial: available(serial), firmware: available(firmware), extra, wellFormed: !echoed && fields.length === 4 };
}

function available(field: string | undefined): string | undefined {
  return field === undefined || field === '' || field === '0' ? undefined : field;
}
