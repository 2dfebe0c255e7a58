import { describe, expect, test } from 'vitest';
import { BadInputError } from '../../../shared/errors.js';
import { checkSheet } from '../../../shared/sheet/check-sheet.js';
import { readSheet } from '../../../shared/sheet/read-sheet.js';
import { exampleText, heron } from '../../helpers/fixtures.js';

// Rules: contract, section 2; "a sheet that contradicts itself says where".
const HERON = exampleText('heron-h6.yaml');
const WREN = exampleText('wren-w3.yaml');
const PLOVER = exampleText('plover-p4.yaml');

function faultOf(text: string): { file: string | undefined; line: number | undefined; reason: string } {
  try {
    readSheet(text, 'sheet.yaml');
  } catch (error) {
    if (error instanceof BadInputError) return { file: error.file, line: error.line, reason: error.message };
    throw error;
  }
  throw new Error('nothing was refused');
}
const lineOf = (text: string, part: string): number => text.split('\n').findIndex((line) => line.includes(part)) + 1;
const heronWith = (from: string | RegExp, to: string): string => {
  expect(HERON).toMatch(from instanceof RegExp ? from : new RegExp(from.replace(/[.*+?^${}()|[\]\\]/g, '\\$&')));
  return HERON.replace(from, to);
};
const CHECKS = `checks:
  - {id: pump, title: Pump, kind: measure, condition: dead, quantity: resistance, unit: ohm, low: 140, high: 180}
`;

describe('a sheet that is in order', () => {
  test.each(['heron-h6.yaml', 'wren-w3.yaml', 'plover-p4.yaml'])('When %s of the contract is read, then it has no findings', (name) => {
    const sheet = readSheet(exampleText(name), name);
    expect(`${sheet.family}.yaml`).toBe(name);
    expect(checkSheet(sheet)).toEqual([]);
  });

  test('When a lamp is off or on, then these are words and no truth values', () => {
    // YAML 1.2, core schema: on and off are strings (contract, section 2).
    const sheet = readSheet(PLOVER);
    expect(sheet.coding.kind === 'steady-pattern' ? sheet.coding.patterns[0]?.lamps : {}).toEqual({
      filter: 'slow',
      tank: 'on',
      dry: 'off',
      end: 'fast',
    });
  });

  test('When the same sheet comes as JSON, then it is the same sheet', () => {
    expect(readSheet(JSON.stringify(heron))).toEqual(heron);
    expect(readSheet(JSON.stringify(heron, null, '\t'))).toEqual(heron);
    expect(readSheet('\uFEFF' + JSON.stringify(heron))).toEqual(heron);
  });
});

describe('a sheet that is wrong', () => {
  test.each([
    ['is empty', '', /empty/],
    ['is no YAML', 'format: [', /no YAML or JSON/],
    ['is a list', '- 1\n- 2\n', /object/],
    ['is of another format', heronWith('refettle.sheet', 'other.sheet'), /format/],
    ['is of another version', heronWith('version: 1', 'version: 2'), /version/],
    ['has a key twice', heronWith('edition: 1', 'edition: 1\nedition: 2'), /unique/i],
    ['has an unknown key', heronWith('edition: 1', 'edition: 1\ncolour: red'), /colour/],
    ['has an unknown coding', heronWith('kind: weighted-phases', 'kind: morse'), /coding\.kind|kind/],
    ['has a band upside down', heronWith('phaseS: [0.8, 2.5]', 'phaseS: [2.5, 0.8]'), /least of a band/],
  ])('When it %s, then the reason says so', (_, text, reason) => {
    const fault = faultOf(text);
    expect(fault.reason).toMatch(reason);
    expect(fault.file).toBe('sheet.yaml');
  });

  test.each([
    ['a weight belongs to no lamp', heronWith('fill: 1, wash', 'full: 1, wash'), 'weights:', /lamp 'full' is not among/],
    ['a weight stands twice', heronWith('rinse: 4', 'rinse: 2'), 'weights:', /weight 2 stands twice: 'wash' and 'rinse'/],
    ['the selector has a weight', heronWith('drain: 8}', 'drain: 8, spin: 16}'), 'weights:', /selector 'spin' can't have a weight/],
    ['the selector is no lamp', heronWith('selector: spin', 'selector: spun'), 'selector:', /lamp 'spun' is not among/],
    ['a ready lamp is no lamp', heronWith('lamps: [fill, wash', 'lamps: [fill, mash'), '[fill, mash', /lamp 'mash' is not among/],
    ['a lamp id stands twice', heronWith('id: lock', 'id: spin'), 'label: Lock', /lamp 'spin' stands twice/],
    ['the code hides a digit', heronWith('G{on}K{off}', 'G{on}'), 'code: "G{on}"', /\{on\} and \{off\}/],
    ['a code has two faults', heronWith('code: G2K9', 'code: G5K3'), 'Spin not started', /'G5K3' has two faults/],
    ['a check has no limits', HERON + CHECKS.replace(', low: 140, high: 180', ''), 'id: pump', /no limits/],
    ['a check has them upside down', HERON + CHECKS.replace('low: 140', 'low: 190'), 'id: pump', /low 190 is above high 180/],
    ['a check id stands twice', `${HERON}${CHECKS}${CHECKS.split('\n')[1] ?? ''}\n`, 'id: pump', /check 'pump' stands twice/],
    [
      'a lock lamp is no lamp',
      `${HERON}procedures:\n  - {id: run, title: Run, steps: [Start]}\ncalibration: {procedure: run, durationS: [200, 300], lockLamp: door}\n`,
      'lockLamp',
      /lamp 'door' is not among/,
    ],
    [
      'the calibration names no procedure',
      `${HERON}calibration: {procedure: run, durationS: [200, 300], lockLamp: lock}\n`,
      'procedure: run',
      /procedure 'run' is not among/,
    ],
    ['a pause is as short as a gap', WREN.replace('pauseS: [0.9', 'pauseS: [0.4'), 'pauseS', /can't be told apart/],
    ['a flash lamp is no lamp', WREN.replace('lamp: power', 'lamp: towel'), 'lamp: towel', /lamp 'towel' is not among/],
    [
      'two patterns look alike',
      PLOVER.replace('dry: slow', 'dry: slow, end: off').replace(
        '{code: P2, lamps: {filter: off, tank: fast, dry: on, end: off}}',
        '{code: P2, lamps: {filter: off, tank: slow, dry: slow}}',
      ),
      'code: P3',
      /looks the same/,
    ],
    ['slow and fast overlap', PLOVER.replace('fast: [1.4', 'fast: [0.7'), 'rateHz', /overlap/],
    ['a hold is too short to see two periods', PLOVER.replace('holdS: 6', 'holdS: 3'), 'holdS', /two periods/],
  ])('When %s, then line and reason are named', (_, text, part, reason) => {
    const fault = faultOf(text);
    expect(fault.reason).toMatch(reason);
    // The last of equal lines: what stands twice is at fault the second time.
    const lines = text.split('\n').flatMap((line, index) => (line.includes(part) ? [index + 1] : []));
    expect(fault.line).toBe(lines.at(-1) ?? lineOf(text, part));
  });

  test('When ready blink and two phases may take the same time, then it is a warning and no error', () => {
    const text = heronWith('periodS: [0.4, 1.4]', 'periodS: [0.4, 1.8]');
    const sheet = readSheet(text);
    expect(checkSheet(sheet)).toEqual([expect.objectContaining({ severity: 'warning', path: ['ready', 'periodS'] })]);
  });

  test('When aliases would grow without end, then the sheet is refused', () => {
    const bomb = [
      'a: &a [x,x,x,x,x,x,x,x,x]',
      ...['b', 'c', 'd', 'e', 'f'].map(
        (key, index) => `${key}: &${key} [${`*${'abcde'[index] ?? 'a'},`.repeat(8)}*${'abcde'[index] ?? 'a'}]`,
      ),
    ].join('\n');
    expect(faultOf(bomb).reason).toMatch(/can't be read/);
  });
});
