import type { Context } from '../context.js';
import { EXIT } from '../exit-codes.js';
import { runProgram } from '../program.js';
import { shellLine } from './shell-words.js';

/**
 * Does what the command line would do, after showing it: whoever uses the menu learns the commands.
 * Ctrl-C ends the command and comes back here, once; the second one leaves.
 */
export async function doCommand(args: readonly string[], context: Context): Promise<number> {
  const { stderr, interruption } = context;
  const { ink } = await stderr.style();
  stderr.write(`${ink.dim(`$ ${shellLine(['refettle', ...args])}`)}\n`);
  const command = context.forCommand();
  return interruption.lend(command.interruption, () => runProgram(args, command));
}

/** The same, and then waits, so that what it said is read before the menu stands there again. */
export async function doAndWait(args: readonly string[], context: Context): Promise<void> {
  const code = await doCommand(args, context);
  if (context.interruption.interrupted) return;
  const { ink } = await context.stderr.style();
  const ended = code === EXIT.good ? '' : `${ink.dim(code === EXIT.stopped ? 'stopped by Ctrl-C' : `exit ${code}`)}   `;
  await context.prompt.key({
    message: `\n${ended}`.trimEnd(),
    keys: [{ key: '\r', word: 'back to the menu' }],
    again: ' ',
    instead: 'run it at a terminal',
  });
}
