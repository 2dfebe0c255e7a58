import { parseIdentification } from '../../shared/measure/scpi-identification.js';

/** `sure`: both say the same serial number; `alike`: one of them says none, so that it may be another of its model. */
export type Likeness = 'sure' | 'alike' | 'different';

/**
 * How far what answered `*IDN?` is the instrument that the rig file names. Firmware may have been renewed.
 *
 * @example likenessOf('Millrace,BM-4,0,1.0', 'Millrace,BM-4,0,1.0') // 'alike'
 */
export function likenessOf(written: string, answered: string): Likeness {
  const [one, other] = [parseIdentification(written), parseIdentification(answered)];
  const same = (a: string, b: string): boolean => a.toLowerCase() === b.toLowerCase();
  if (!same(one.maker, other.maker) || !same(one.model, other.model)) return 'different';
  if (one.serial === undefined || other.serial === undefined) return 'alike';
  return same(one.serial, other.serial) ? 'sure' : 'different';
}

/**
 * Whether what answered `*IDN?` can be the instrument that the rig file names: the same maker and model, and the same serial number where
 * both say one.
 *
 * @example isSameInstrument('Millrace,BM-4,7,1.0', 'MILLRACE,BM-4,7,1.2') // true
 */
export const isSameInstrument = (written: string, answered: string): boolean => likenessOf(written, answered) !== 'different';
