import { afterEach, describe, expect, test } from 'vitest';
import {
  DisconnectedError,
  GarbageError,
  InstrumentError,
  InstrumentRefusalError,
  InstrumentTimeoutError,
  NotANumberError,
  OverloadError,
} from '../../../cli/instruments/instrument-error.js';
import { MEASURE_COMMANDS, openMeter, type Quantity } from '../../../cli/instruments/meter.js';
import { SimulatedMeter, type Measured } from '../../../cli/instruments/simulated/simulated-meter.js';
import { SimulatedScpi } from '../../../cli/instruments/simulated/simulated-scpi.js';
import type { Transport } from '../../../cli/instruments/transport.js';
import { opened, ScriptedInstrument } from './scripted-instrument.js';

let open: Transport[] = [];
afterEach(async () => {
  await Promise.all(open.map((transport) => transport.close()));
  open = [];
});

async function meterThat(measures: Measured[]) {
  let pull = (): void => undefined;
  const { transport, unplug } = await opened(
    new SimulatedMeter('Millrace,BM-4,0,1.0', () => measures.shift() ?? 'overload', { unplug: () => pull() }),
  );
  pull = unplug;
  open.push(transport);
  return openMeter(transport, { measureTimeoutMs: 60 });
}

describe('a meter', () => {
  test('When it is opened, then it says who it is', async () => {
    expect((await meterThat([])).identification).toBe('Millrace,BM-4,0,1.0');
  });

  test("When it measures, then value and raw answer are the instrument's own", async () => {
    const meter = await meterThat([96.4, -5, 0, 2.31e6]);
    expect(await meter.measure('resistance')).toEqual({ value: 96.4, raw: '+9.64000000E+01' });
    expect(await meter.measure('voltage dc')).toEqual({ value: -5, raw: '-5.00000000E+00' });
    expect((await meter.measure('resistance')).value).toBe(0);
    expect((await meter.measure('insulation resistance')).value).toBe(2_310_000);
  });

  test.each([
    ['overload', OverloadError, /overload: there is no reading/],
    ['nan', NotANumberError, /has no number/],
    ['timeout', InstrumentTimeoutError, /no answer to 'MEASure:RESistance\?'/],
    ['garbage', GarbageError, /nothing that can be read/],
    ['unplugged', DisconnectedError, /unplugged or switched off/],
  ] as const)(
    'When it has %s instead of a reading, then that is an error of its own, with something to do',
    async (measured, kind, words) => {
      const meter = await meterThat([measured]);
      const error = await meter.measure('resistance').catch((reason: unknown) => reason);
      expect(error).toBeInstanceOf(kind);
      expect(error).toBeInstanceOf(InstrumentError);
      expect((error as InstrumentError).message).toMatch(words);
      expect((error as InstrumentError).message).toMatch(/^M-03 on \/sim\//);
      expect((error as InstrumentError).toDo.length).toBeGreaterThan(10);
    },
  );

  test.each(['overload', 'nan', 'timeout', 'garbage'] as const)('When a reading comes after %s, then it is read', async (measured) => {
    const meter = await meterThat([measured, 26.8]);
    await expect(meter.measure('resistance')).rejects.toBeInstanceOf(InstrumentError);
    expect((await meter.measure('resistance')).value).toBe(26.8);
  });

  /** A meter that answers each MEASure as told, one text after another, each with its own line ends. */
  async function meterSaying(...answers: ((send: (text: string) => void) => void)[]) {
    const instrument = new ScriptedInstrument((line, self) => {
      if (line === 'SYSTem:ERRor?') return '0,"No error"\n';
      if (line === '*IDN?') return 'Millrace,BM-4,0,1.0\n';
      answers.shift()?.((text) => self.send(text));
      return undefined;
    });
    const { transport } = await opened(instrument);
    open.push(transport);
    return { meter: await openMeter(transport, { measureTimeoutMs: 60 }), instrument };
  }
  const says =
    (text: string, afterMs = 0) =>
    (send: (text: string) => void): void => {
      if (afterMs === 0) send(text);
      else setTimeout(() => send(text), afterMs);
    };
  const asked = ({ received }: ScriptedInstrument): number => received.filter((line) => line.startsWith('MEAS')).length;

  test('When its answer comes after the time-out and in the middle of the next question, then it is never taken for the new one', async () => {
    const { meter } = await meterSaying(says('+1.0E0\n', 90), says('+2.0E0\n'), says('+3.0E0\n'));
    await expect(meter.measure('resistance')).rejects.toBeInstanceOf(InstrumentTimeoutError);
    expect((await meter.measure('resistance')).value).toBe(2);
    await new Promise((resolve) => setTimeout(resolve, 60));
    expect((await meter.measure('resistance')).value).toBe(3);
  });

  test('When an old answer stands before the new one, then both are thrown away and it is asked again', async () => {
    const { meter, instrument } = await meterSaying(says('+1.0E0\n+2.0E0\n'), says('+2.0E0\n'));
    expect((await meter.measure('resistance')).value).toBe(2);
    expect(asked(instrument)).toBe(2);
  });

  test('When the same answer comes twice, then it is one answer, and the second is not the next one', async () => {
    const { meter, instrument } = await meterSaying(says('+1.0E0\n+1.0E0\n'), says('+2.0E0\n'));
    expect((await meter.measure('resistance')).value).toBe(1);
    expect((await meter.measure('resistance')).value).toBe(2);
    expect(asked(instrument)).toBe(2);
  });

  test('When every question has two different answers, then that is said and none of them is a reading', async () => {
    const two = says('+1.0E0\n+2.0E0\n');
    const { meter, instrument } = await meterSaying(two, two, two, two);
    await expect(meter.measure('resistance')).rejects.toMatchObject({
      name: 'TwoAnswersError',
      message: expect.stringContaining("differently: '+1.0E0', '+2.0E0'") as string,
    });
    expect(asked(instrument)).toBe(3);
  });

  test('When a line stops in the middle, then half a number is no reading, and the rest does not become one', async () => {
    const { meter } = await meterSaying(says('+9.6'), says('4E+01\n+2.0E0\n'), says('+2.0E0\n'));
    await expect(meter.measure('resistance')).rejects.toMatchObject({ name: 'HalfAnswerError', answer: '+9.6' });
    // The rest comes with the next answer: two answers, so it is asked a third time.
    expect((await meter.measure('resistance')).value).toBe(2);
  });

  test.each([
    ['NULs', `${'\0'.repeat(40)}\n`],
    ['NULs without a line end', '\0'.repeat(40)],
    ['a line without end', 'x'.repeat(5000)],
  ])('When it sends %s, then that is said, and the next answer is read', async (_what, text) => {
    const { meter } = await meterSaying(says(text), says('\n+2.0E0\n'));
    await expect(meter.measure('resistance')).rejects.toMatchObject({ name: 'NoLinesError' });
    expect((await meter.measure('resistance')).value).toBe(2);
  });

  test('When NULs stand around the answer, then it is read; when one stands in it, then it is garbage', async () => {
    const { meter } = await meterSaying(says('\0\0+1.5E0\0\r\n'), says('1\x002.5\n'));
    expect((await meter.measure('resistance')).value).toBe(1.5);
    await expect(meter.measure('resistance')).rejects.toBeInstanceOf(GarbageError);
  });

  test('When it answers and reports an error with it, then the answer is no reading', async () => {
    const errors = ['-222,"Data out of range"\n'];
    let measured = false;
    const instrument = new ScriptedInstrument((line) => {
      if (line === 'SYSTem:ERRor?') return (measured ? errors.shift() : undefined) ?? '0,"No error"\n';
      if (line === '*IDN?') return 'Millrace,BM-4,0,1.0\n';
      measured = true;
      return '+1.0E0\n';
    });
    const { transport } = await opened(instrument);
    open.push(transport);
    const meter = await openMeter(transport, { measureTimeoutMs: 60 });
    await expect(meter.measure('resistance')).rejects.toMatchObject({ name: 'InstrumentRefusalError', number: -222 });
    expect((await meter.measure('resistance')).value).toBe(1);
  });

  test('When it does not know the command, then its own words say why', async () => {
    const { transport } = await opened(new SimulatedScpi('Millrace,BM-1,0,1.0', []));
    open.push(transport);
    const meter = await openMeter(transport, { measureTimeoutMs: 60 });
    const error = await meter.measure('capacitance').catch((reason: unknown) => reason);
    expect(error).toBeInstanceOf(InstrumentRefusalError);
    expect(error).toMatchObject({
      number: -113,
      message: expect.stringContaining("refused 'MEASure:CAPacitance?': -113, Undefined header (MEASure:CAPacitance?)") as string,
    });
  });

  test('When it sends a word or a number of its own for overload, then it is no reading either', async () => {
    // OVLOAD and 1.0000E+8: found in instrument manuals in place of 9.9E37.
    const answers = ['OVLOAD\r\n', '1.0000E+8\r\n'];
    const { transport } = await opened(
      new ScriptedInstrument((line) =>
        line === 'SYSTem:ERRor?' ? '+0,"No error"\r\n' : line === '*IDN?' ? '*IDN Millrace,BM-2,0,1,extra\r\n' : answers.shift(),
      ),
    );
    open.push(transport);
    const meter = await openMeter(transport, { measureTimeoutMs: 60, overloadFrom: () => 1e8 });
    await expect(meter.measure('resistance')).rejects.toBeInstanceOf(OverloadError);
    await expect(meter.measure('resistance')).rejects.toBeInstanceOf(OverloadError);
  });

  test('When each quantity is measured, then it is asked for by its SCPI header', async () => {
    const received: string[] = [];
    const instrument = new ScriptedInstrument((line) =>
      line === 'SYSTem:ERRor?' ? '0,"No error"\n' : line === '*IDN?' ? 'Millrace,BM-4,0,1.0\n' : '1E0\n',
    );
    const { transport } = await opened(instrument);
    open.push(transport);
    const meter = await openMeter(transport);
    for (const quantity of Object.keys(MEASURE_COMMANDS) as Quantity[]) await meter.measure(quantity);
    // Between them the error queue is read, so that an answer that comes twice is noticed.
    received.push(...instrument.received.slice(2).filter((line) => line !== 'SYSTem:ERRor?'));
    // SCPI-99 volume 2, MEASure; the quantities are those of the service sheet.
    expect(received).toEqual([
      'MEASure:RESistance?',
      'MEASure:RESistance?',
      'MEASure:VOLTage:AC?',
      'MEASure:VOLTage:DC?',
      'MEASure:CURRent:AC?',
      'MEASure:CAPacitance?',
      'MEASure:TEMPerature?',
    ]);
  });
});
