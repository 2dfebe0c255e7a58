import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { xorChecksum } from '../../../shared/measure/checksum.js';
import { parseScpiError } from '../../../shared/measure/scpi-error.js';
import { scpiHeaderMatches } from '../../../shared/measure/scpi-header.js';
import { parseIdentification } from '../../../shared/measure/scpi-identification.js';
import { parseScpiNumber } from '../../../shared/measure/scpi-value.js';

describe('parseScpiNumber', () => {
  // IEEE 488.2 NR1, NR2, NR3; the samples with many digits are from instrument manuals.
  test.each([
    ['0', 0],
    ['+12', 12],
    ['-3.5', -3.5],
    ['8.40000000E+00', 8.4],
    ['+3.0153000E-09', 3.0153e-9],
    ['+1.23456E-03', 0.00123456],
    ['29.657E+3', 29657],
    ['106.45E-3', 0.10645],
    [' 1.2e-1\r\n', 0.12],
    ['9.8999E+37', 9.8999e37],
  ])('When a meter answers %s, then it is the reading %d', (text, value) => {
    expect(parseScpiNumber(text)).toEqual({ kind: 'value', value });
  });

  // SCPI-99 volume 1: ±9.9E37 infinity. Spellings as seen in real traffic and in instrument manuals.
  test.each([
    ['9.9E37', 1],
    ['+9.90E+37', 1],
    ['9.9E+37', 1],
    ['99E36', 1],
    ['1E38', 1],
    ['1E999', 1],
    ['-9.9E37', -1],
    ['OVLOAD', 1],
    ['OVFLOW', 1],
    ['-OVLOAD', -1],
    ['INF', 1],
    ['NINF', -1],
  ] as const)('When a meter answers %s, then it is an overload and never a reading', (text, sign) => {
    expect(parseScpiNumber(text)).toEqual({ kind: 'overload', sign });
  });

  test.each(['9.91E37', '9.91000E+37', '+9.91e+37', '-9.91000E+37', 'NAN'])(
    'When a meter answers %s, then it is not a number (SCPI-99 volume 1)',
    (text) => {
      expect(parseScpiNumber(text)).toEqual({ kind: 'not-a-number' });
    },
  );

  test.each(['', 'hello', '1.2.3', '1,2', '12 OHM', '0x10', '1e', '1E+', '--1', '-113,"Undefined header"'])(
    "When a meter answers '%s', then it is garbage",
    (text) => {
      expect(parseScpiNumber(text)).toEqual({ kind: 'garbage', text });
    },
  );

  test('When a meter has a sentinel of its own, then that and what is above is an overload', () => {
    // An instrument manual: 1.0000E+8 for overflow, 1.0000E+9 for a fault.
    expect(parseScpiNumber('1.0000E+8', { overloadFrom: 1e8 })).toEqual({ kind: 'overload', sign: 1 });
    expect(parseScpiNumber('1.0000E+9', { overloadFrom: 1e8 })).toEqual({ kind: 'overload', sign: 1 });
    expect(parseScpiNumber('9.9999E+7', { overloadFrom: 1e8 })).toEqual({ kind: 'value', value: 9.9999e7 });
  });

  test('When any text comes, then nothing at or above 9.9e37 is ever a reading', () => {
    fc.assert(
      fc.property(
        fc.oneof(
          fc.string(),
          fc.double().map(String),
          fc.double().map((value) => value.toExponential(6)),
        ),
        (text) => {
          const parsed = parseScpiNumber(text);
          return parsed.kind !== 'value' || (Number.isFinite(parsed.value) && Math.abs(parsed.value) < 9.9e37);
        },
      ),
    );
  });
});

describe('parseIdentification', () => {
  test('When four fields come, then each has its name', () => {
    // Four fields, the fourth with hyphens: the form of an instrument manual's sample; names invented.
    expect(parseIdentification('Millrace,BM-4,MR12345678,1.00-1.00-2.00-1.00')).toEqual({
      maker: 'Millrace',
      model: 'BM-4',
      serial: 'MR12345678',
      firmware: '1.00-1.00-2.00-1.00',
      extra: [],
      wellFormed: true,
    });
  });

  test('When serial or firmware is 0, then it is not available', () => {
    // `MA,IN,0,VER` is the answer in an open SCPI parser's own tests; 0 for "not available" is IEEE 488.2.
    expect(parseIdentification('MA,IN,0,VER\r\n')).toMatchObject({
      maker: 'MA',
      model: 'IN',
      serial: undefined,
      firmware: 'VER',
      wellFormed: true,
    });
  });

  test('When an instrument echoes the header and sends five fields, then it is read all the same and marked', () => {
    // The form of a real instrument's deviant answer in its manual; the names are invented.
    expect(parseIdentification('*IDN Millrace,4054,00-00-00-13-22,1.01.01.10R1,20.234.3.')).toEqual({
      maker: 'Millrace',
      model: '4054',
      serial: '00-00-00-13-22',
      firmware: '1.01.01.10R1',
      extra: ['20.234.3.'],
      wellFormed: false,
    });
  });

  test('When too little comes, or anything at all, then nothing is thrown', () => {
    expect(parseIdentification('')).toMatchObject({ maker: '', model: '', serial: undefined, wellFormed: false });
    fc.assert(fc.property(fc.string(), (text) => typeof parseIdentification(text).maker === 'string'));
  });
});

describe('parseScpiError', () => {
  // The first three: an open SCPI parser's own tests; `+0` and the doubled quotes: instrument manuals and IEEE 488.2 string data.
  test.each([
    ['-113,"Undefined header;ABCD"', { number: -113, text: 'Undefined header', info: 'ABCD' }],
    ['-113,"Undefined header"', { number: -113, text: 'Undefined header', info: undefined }],
    ['0,"No error"', { number: 0, text: 'No error', info: undefined }],
    ['+0,"No error"', { number: 0, text: 'No error', info: undefined }],
    ['-350,"Queue overflow"\r', { number: -350, text: 'Queue overflow', info: undefined }],
    ['-224,"Illegal parameter value;say ""ON"""', { number: -224, text: 'Illegal parameter value', info: 'say "ON"' }],
  ])('When the queue answers %s, then number, text and addition are told apart', (text, error) => {
    expect(parseScpiError(text)).toEqual(error);
  });

  test.each(['', '0', 'No error', '-113,Undefined header', '8.4E+00'])("When '%s' comes instead, then it is no queue entry", (text) => {
    expect(parseScpiError(text)).toBeUndefined();
  });
});

describe('scpiHeaderMatches', () => {
  // An open SCPI parser's own pattern tests; the MEASure lines follow SCPI-99's rule of exactly the long or the short form.
  test.each([
    ['ABcc:AACddd', 'ab:aac', true],
    ['abcc:aacdd', 'ab:aac', false],
    ['MEASure[:SCALar]:CURRent[:DC]?', 'MEAS:CURR?', true],
    ['MEASure[:SCALar]:CURRent[:DC]?', ':MEAS:SCAL:CURR:DC?', true],
    ['MEASure[:SCALar]:CURRent[:DC]?', 'MEAS:CURR:DC?', true],
    ['MEASure[:SCALar]:CURRent[:DC]?', 'MEAS?', false],
    ['MEASure[:SCALar]:CURRent[:DC]?', 'MEAS:DC?', false],
    ['MEASure[:SCALar]:CURRent[:DC]?', 'MEASU:CURR?', false],
    ['*IDN?', '*idn?', true],
    ['*IDN?', ':*idn?', false],
    ['*IDN?', 'idn?', false],
    ['SYSTem:ERRor?', 'syst:err?', true],
    ['SYSTem:PRESet', ':SYSTe:PRESe', false],
  ])('When the pattern is %s and %s comes, then matching is %s', (pattern, header, matches) => {
    expect(scpiHeaderMatches(pattern, header)).toBe(matches);
  });
});

describe('xorChecksum', () => {
  // Published sentences of the NMEA 0183 form with their check digits.
  test.each([
    ['PSRF103,00,01,00,01', '25'],
    ['GPGGA,015808.00,2726.53758,S,15126.05255,E,1,08,1.0,365.1,M,39.5,M,,', '79'],
    ['GNGLL,2239.37849,N,11400.75600,E,123254.00,A,A', '7F'],
    ['GPGGA,000003.071,7900.56904,N,16607.52019,W,1,09,0.8,4.64,M,,,,', '26'],
    ['', '00'],
  ])("When the line holds '%s', then the check is %s", (text, check) => {
    expect(xorChecksum(text)).toBe(check);
  });
});
