import { afterEach, describe, expect, test } from 'vitest';
import { NobodyToAskError, StoppedError } from '../../cli/errors.js';
import { benchTerminal, type BenchTerminal } from '../helpers/bench-terminal.js';

const YES_NO = {
  keys: [
    { key: 'y', word: 'yes' },
    { key: 'n', word: 'no' },
  ],
  message: 'Done?',
  instead: 'run it at a terminal',
} as const;
let bench: BenchTerminal;
afterEach(() => bench.remove());

describe('Questions', () => {
  test('When standard input is no terminal, then every question refuses and names the option that answers it', async () => {
    bench = benchTerminal();
    const { prompt } = bench.context;
    const instead = 'give it with --serial';
    for (const asked of [
      prompt.key({ ...YES_NO, instead }),
      prompt.text({ message: 'Serial', instead }),
      prompt.secret({ message: 'Serial', instead }),
      prompt.choice({ message: 'Serial', choices: [], instead }),
    ]) {
      await expect(asked).rejects.toThrow(NobodyToAskError);
      await expect(asked).rejects.toThrow(/--serial/);
    }
    expect(bench.stdout()).toBe('');
  });

  test('When Enter, a blank or another key is pressed, then a question with no default asks again, and the answer counts only after that', async () => {
    bench = benchTerminal({ terminal: true }).when('Done?', '\r').when('Done?', ' ').when('Done?', '\u001b[A').when('Done?', 'y');
    expect(await bench.context.prompt.key(YES_NO)).toBe('y');
    expect(bench.stderr().match(/There is no default/g)).toHaveLength(3);
    expect(bench.stdout()).toBe('');
    expect(bench.raw()).toBe(0);
  });

  test('When keys were typed before the question was there, then they answer nothing', async () => {
    bench = benchTerminal({ terminal: true });
    (bench.context.stdin as unknown as { write(text: string): void }).write('yyy');
    bench.when('Done?', 'n');
    expect(await bench.context.prompt.key(YES_NO)).toBe('n');
  });

  test('When Ctrl-C is pressed at a question, then it ends as stopped and the terminal is given back', async () => {
    bench = benchTerminal({ terminal: true }).when('Done?', '\u0003');
    await expect(bench.context.prompt.key(YES_NO)).rejects.toThrow(StoppedError);
    expect(bench.raw()).toBe(0);
    expect(bench.context.interruption.interrupted).toBe(true);
  });
});

describe('Ctrl-C', () => {
  test('When nothing is being recorded, then the first one leaves', () => {
    bench = benchTerminal();
    bench.context.interruption.interrupt();
    expect(bench.left()).toBe(1);
  });

  test('When something is being recorded, then the first one asks for a safe end and the second leaves at once', async () => {
    bench = benchTerminal();
    const { interruption } = bench.context;
    await interruption.hold(() => {
      interruption.interrupt();
      expect([bench.left(), interruption.signal.aborted]).toEqual([0, true]);
      interruption.interrupt();
      expect(bench.left()).toBe(1);
      return Promise.resolve();
    });
  });
});
