import { parseIdentification } from '../../shared/measure/scpi-identification.js';

/**
 * Whether what answered `*IDN?` is the instrument that the rig file names: the same maker and model, and the same serial number where
 * both say one. Firmware may have been renewed.
 *
 * @example isSameInstrument('Millrace,BM-4,7,1.0', 'MILLRACE,BM-4,7,1.2') // true
 */
export function isSameInstrument(written: string, answered: string): boolean {
  const [one, other] = [parseIdentification(written), parseIdentification(answered)];
  const alike = (a: string, b: string): boolean => a.toLowerCase() === b.toLowerCase();
  return (
    alike(one.maker, other.maker) &&
    alike(one.model, other.model) &&
    (one.serial === undefined || other.serial === undefined || alike(one.serial, other.serial))
  );
}
