import { randomInt } from 'node:crypto';

/** No 0 O, 1 I L, no vowels: it is read off paper, typed by a thumb, and must not spell anything. */
const ALPHABET = '23456789BCDFGHJKMNPQRSTVWXZ';
const LENGTH = 4;

/** Four characters for who cannot scan. */
export const newLookUpWord = (): string => Array.from({ length: LENGTH }, () => ALPHABET[randomInt(ALPHABET.length)]).join('');
