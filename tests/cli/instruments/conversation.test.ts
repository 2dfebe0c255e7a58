import { setTimeout as sleep } from 'node:timers/promises';
import { afterEach, describe, expect, test } from 'vitest';
import {
  DisconnectedError,
  InstrumentError,
  InstrumentTimeoutError,
  PortBusyError,
  PortClosedError,
  PortMissingError,
  PermissionError,
} from '../../../cli/instruments/instrument-error.js';
import { ScpiConversation } from '../../../cli/instruments/scpi-conversation.js';
import { SimulatedScpi } from '../../../cli/instruments/simulated/simulated-scpi.js';
import { openTransport, simulatedBinding, type Binding, type Transport } from '../../../cli/instruments/transport.js';
import { opened, ScriptedInstrument } from './scripted-instrument.js';

const NO_ERROR = '0,"No error"\n';
let open: Transport[] = [];
afterEach(async () => {
  await Promise.all(open.map((transport) => transport.close()));
  open = [];
});

async function conversationWith(answer: (line: string, instrument: ScriptedInstrument) => string | undefined, options = {}) {
  const instrument = new ScriptedInstrument((line, self) => (line === 'SYSTem:ERRor?' ? NO_ERROR : answer(line, self)));
  const { transport, unplug } = await opened(instrument);
  open.push(transport);
  return { conversation: new ScpiConversation(transport, options), instrument, unplug, transport };
}

describe('a conversation', () => {
  test('When it begins, then the error queue is read first, so that what stood in the port is no answer', async () => {
    const { conversation, instrument } = await conversationWith(() => '+1.5\r\n');
    instrument.send('stale\n');
    expect(await conversation.ask('READ?')).toBe('+1.5');
    expect(instrument.received).toEqual(['SYSTem:ERRor?', 'READ?']);
    expect(conversation.unasked).toBe(1);
  });

  test('When two questions are asked at once, then the second waits for the first answer', async () => {
    const { conversation, instrument } = await conversationWith((line, self) => {
      setTimeout(() => self.send(`answer to ${line}\n`), 20);
      return undefined;
    });
    const answers = await Promise.all([conversation.ask('A?'), conversation.ask('B?')]);
    expect(answers).toEqual(['answer to A?', 'answer to B?']);
    expect(instrument.received).toEqual(['SYSTem:ERRor?', 'A?', 'B?']);
  });

  test('When the answer comes before the write is done, then the waiter is already there', async () => {
    // The mock answers inside write(): only a waiter that was registered before can hear it.
    const { conversation } = await conversationWith(() => 'at once\n');
    expect(await conversation.ask('A?')).toBe('at once');
  });

  test('When no answer comes, then it ends in a time-out that names instrument, port and question', async () => {
    const { conversation, transport } = await conversationWith(() => undefined);
    const error = await conversation.ask('READ?', { timeoutMs: 30 }).catch((reason: unknown) => reason);
    expect(error).toBeInstanceOf(InstrumentTimeoutError);
    expect(error).toMatchObject({
      instrument: 'M-03',
      port: transport.port,
      timeoutMs: 30,
      message: `M-03 on ${transport.port}: no answer to 'READ?' within 30 ms`,
    });
    expect((error as InstrumentError).toDo).not.toBe('');
  });

  test('When an answer comes after its time-out, then it is not taken for the next one', async () => {
    let asked = 0;
    const { conversation } = await conversationWith((_line, self) => {
      asked += 1;
      if (asked > 1) return '+2.0\n';
      setTimeout(() => self.send('+1.0\n'), 60);
      return undefined;
    });
    await expect(conversation.ask('READ?', { timeoutMs: 30 })).rejects.toBeInstanceOf(InstrumentTimeoutError);
    await sleep(60);
    expect(await conversation.ask('READ?')).toBe('+2.0');
  });

  test('When a late answer stands before the answer to the error query, then it is passed over', async () => {
    let late = true;
    const instrument = new ScriptedInstrument((line) => {
      if (line !== 'SYSTem:ERRor?') return '+2.0\n';
      const text = late ? `+1.0\n${NO_ERROR}` : NO_ERROR;
      late = false;
      return text;
    });
    const { transport } = await opened(instrument);
    open.push(transport);
    expect(await new ScpiConversation(transport).ask('READ?')).toBe('+2.0');
  });

  test('When the cable is pulled, then what waits is refused at once and so is what is asked later', async () => {
    const { conversation, unplug } = await conversationWith(() => undefined);
    const waiting = conversation.ask('READ?', { timeoutMs: 20_000 });
    const waitingToo = conversation.ask('READ?', { timeoutMs: 20_000 });
    setTimeout(unplug, 20);
    await expect(waiting).rejects.toBeInstanceOf(DisconnectedError);
    await expect(waitingToo).rejects.toBeInstanceOf(DisconnectedError);
    await expect(conversation.ask('READ?')).rejects.toBeInstanceOf(DisconnectedError);
    await expect(conversation.tell('*CLS')).rejects.toBeInstanceOf(DisconnectedError);
  });

  test('When the port is closed, then what waits is refused', async () => {
    const { conversation, transport } = await conversationWith(() => undefined);
    const waiting = conversation.ask('READ?', { timeoutMs: 20_000 });
    setTimeout(() => void transport.close(), 20);
    await expect(waiting).rejects.toBeInstanceOf(PortClosedError);
  });

  test('When garbage comes before the answer, then the next line is found', async () => {
    const { conversation } = await conversationWith(() => undefined);
    const asked = conversation.ask('READ?');
    await expect(Promise.race([asked, sleep(20, 'waiting')])).resolves.toBe('waiting');
    const { conversation: second } = await conversationWith(() => `${'\u00ff'.repeat(3000)}\n+3.0\n`);
    expect(await second.ask('READ?')).toBe('+3.0');
    await open[0]?.close();
    await expect(asked).rejects.toBeInstanceOf(PortClosedError);
  });
});

describe('a simulated instrument', () => {
  function asked(commands: string[]): string[] {
    const answers: string[] = [];
    const instrument = new SimulatedScpi('MA,IN,0,VER', []);
    instrument.connect((text) => answers.push(text));
    for (const command of commands) instrument.receive(command);
    return answers;
  }

  // The first four: an open SCPI parser's own tests; the queue rules: SCPI-99 volume 2, SYSTem:ERRor.
  test.each([
    ['it is asked who it is', ['*IDN?'], ['MA,IN,0,VER\n']],
    ['it is asked twice in one line', ['*IDN?;*IDN?'], ['MA,IN,0,VER;MA,IN,0,VER\n']],
    ['a header is unknown', ['IDN?', 'SYST:ERR?', 'SYST:ERR?'], ['-113,"Undefined header;IDN?"\n', '0,"No error"\n']],
    ['a query has a parameter too many', ['*IDN? 12', 'SYSTem:ERRor?'], ['MA,IN,0,VER\n', '-108,"Parameter not allowed"\n']],
    ['the queue is cleared', ['ABCD', '*CLS', 'syst:err?'], ['0,"No error"\n']],
  ])('When %s, then it answers as the standard says', (_what, commands, answers) => {
    expect(asked(commands)).toEqual(answers);
  });

  test('When more errors come than the queue holds, then the last one says so', () => {
    const answers = asked([...Array.from({ length: 30 }, () => 'WRONG'), ...Array.from({ length: 21 }, () => 'SYST:ERR?')]);
    expect(answers).toHaveLength(21);
    expect(answers[0]).toBe('-113,"Undefined header;WRONG"\n');
    expect(answers[19]).toBe('-350,"Queue overflow"\n');
    expect(answers[20]).toBe('0,"No error"\n');
  });
});

describe('opening a port', () => {
  const failing = (words: string): Binding => ({ open: () => Promise.reject(new Error(words)), list: () => Promise.resolve([]) });

  test('When the port does not exist, then it says so and what to do', async () => {
    const binding = await simulatedBinding();
    const attempt = openTransport({ instrument: 'M-03', path: '/sim/none', baudRate: 9600, binding: binding });
    await expect(attempt).rejects.toMatchObject({ name: 'PortMissingError', instrument: 'M-03', port: '/sim/none' });
  });

  // The words are those of the serial driver's native part on Linux.
  test.each([
    ['Error: No such file or directory, cannot open /dev/ttyUSB7', PortMissingError],
    ['Error Resource temporarily unavailable Cannot lock port', PortBusyError],
    ['Error: Permission denied, cannot open /dev/ttyUSB0', PermissionError],
    ['Error: Inappropriate ioctl for device, cannot open /dev/null', InstrumentError],
  ])('When the driver says "%s", then it is told in our words', async (words, kind) => {
    await expect(
      openTransport({ instrument: 'P-01', path: '/dev/null', baudRate: 115_200, binding: failing(words) }),
    ).rejects.toBeInstanceOf(kind);
  });

  test('When the port may not be used, then the message names the group that may', async () => {
    // /dev/null belongs to root everywhere; a path that isn't there falls back to the usual group.
    const at = (path: string) =>
      openTransport({ instrument: 'P-01', path, baudRate: 9600, binding: failing('Permission denied') }).catch((reason: unknown) => reason);
    expect(await at('/dev/null')).toMatchObject({ group: 'root' });
    expect(await at('/sim/not-there')).toMatchObject({ group: 'dialout', toDo: expect.stringContaining('usermod -aG dialout') as string });
  });

  test('When the port is open already, then it is busy', async () => {
    const { transport } = await opened(new ScriptedInstrument(() => undefined));
    open.push(transport);
    const binding = (await simulatedBinding()) as unknown as Binding;
    await expect(openTransport({ instrument: 'M-03', path: transport.port, baudRate: 9600, binding })).rejects.toBeInstanceOf(
      PortBusyError,
    );
  });
});
