// In a process of its own, because it ends with its process.
import { spawn } from 'node:child_process';
import { once } from 'node:events';
import { text } from 'node:stream/consumers';
import { setTimeout as pause } from 'node:timers/promises';
import { expect, test } from 'vitest';

const secondClosesAfterMs = 1_500;
const script = `
  import { Shutdown } from './server/shutdown.ts';
  const shutdown = new Shutdown(() => {});
  const takes = (name, ms) => () => new Promise((resolve) => setTimeout(() => { console.log('closed ' + name); resolve(); }, ms));
  shutdown.add(takes('what was opened first', 0));
  shutdown.add(() => { throw new Error('planted'); });
  shutdown.add(takes('what was opened last', ${String(secondClosesAfterMs)}));
  shutdown.listenToSignals();
  console.log('ready');
  setInterval(() => {}, 1000);`;

async function stopBy(signals: { signal: NodeJS.Signals; afterMs: number }[]): Promise<{ exitCode: number; lines: string[] }> {
  const program = spawn(process.execPath, ['--import', 'tsx', '--input-type=module', '--eval', script], {
    stdio: ['ignore', 'pipe', 'inherit'],
  });
  const ended = once(program, 'exit') as Promise<[number]>;
  await once(program.stdout, 'readable');
  const output = text(program.stdout);
  for (const { signal, afterMs } of signals) {
    await pause(afterMs);
    program.kill(signal);
  }
  return { exitCode: (await ended)[0], lines: (await output).trim().split('\n') };
}

test.each(['SIGINT', 'SIGTERM'] as const)(
  'When %s arrives, then all is closed, the last opened first, even if one fails, and the exit code is 0',
  async (signal) => {
    expect(await stopBy([{ signal, afterMs: 0 }])).toEqual({
      exitCode: 0,
      lines: ['ready', 'closed what was opened last', 'closed what was opened first'],
    });
  },
);

test('When one press of Ctrl-C arrives twice, by the terminal and by npm, then it counts once', async () => {
  const { exitCode, lines } = await stopBy([
    { signal: 'SIGINT', afterMs: 0 },
    { signal: 'SIGINT', afterMs: 30 },
  ]);

  expect(exitCode).toBe(0);
  expect(lines).toHaveLength(3);
});

test('When Ctrl-C is pressed a second time, then it leaves at once with 130', async () => {
  expect(
    await stopBy([
      { signal: 'SIGINT', afterMs: 0 },
      { signal: 'SIGINT', afterMs: 700 },
    ]),
  ).toEqual({ exitCode: 130, lines: ['ready'] });
});
