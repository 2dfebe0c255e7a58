import { describe, expect, test } from 'vitest';
import { lampFace } from '../../../shared/lamps/face.js';
import { heron } from '../../helpers/unit-facts.js';

describe('The lamp face of a code', () => {
  // Common practice, no published source: lit lamps stand for 8, 4, 2 and 1 and are added; the selector lamp, lit or dark, says which number is shown.
  test('When the code is G5K3, then the selector stands with 4 and 1, and without it 2 and 1', () => {
    const face = lampFace('G5K3', heron);
    expect(face?.title).toBe('Water level does not fall in time');
    expect(face?.rows).toEqual([
      { letter: 'G', lit: [true, false, true, false, true, null], digit: 5, terms: [4, 1] },
      { letter: 'K', lit: [true, true, false, false, false, null], digit: 3, terms: [2, 1] },
    ]);
    expect(face?.lamps.map((lamp) => [lamp.id, lamp.group, lamp.weight])).toEqual([
      ['fill', 'weighted', 1],
      ['wash', 'weighted', 2],
      ['rinse', 'weighted', 4],
      ['drain', 'weighted', 8],
      ['spin', 'selector', undefined],
      ['lock', 'outside', undefined],
    ]);
  });
  // Binary-coded decimal 8-4-2-1, digits 0000 to 1001 (a digital logic design textbook; the same table in an open textbook on the subject).
  test.each([
    [0, '0000'],
    [1, '0001'],
    [2, '0010'],
    [3, '0011'],
    [4, '0100'],
    [5, '0101'],
    [6, '0110'],
    [7, '0111'],
    [8, '1000'],
    [9, '1001'],
  ])('When the digit is %i, then its lamps are %s read from 8 down', (digit, bits) => {
    const row = lampFace(`G${digit}K0`, heron)?.rows[0];
    expect([3, 2, 1, 0].map((column) => (row?.lit[column] ? '1' : '0')).join('')).toBe(bits);
  });
  test('When the text is no code of this sheet, then there is no face', () => {
    expect(lampFace('P1', heron)).toBeUndefined();
    expect(lampFace('G16K1', heron)).toBeUndefined();
  });
});
