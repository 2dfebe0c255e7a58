import { Command, CommanderError } from 'commander';
import type { Context } from './context.js';
import { EXIT } from './exit-codes.js';
import { benchCommands } from './tree/bench.js';
import { completionCommands } from './tree/completion.js';
import { paperCommands } from './tree/paper.js';
import type { Does } from './tree/parts.js';
import { peopleCommands } from './tree/people.js';
import { rigCommands } from './tree/rig.js';
import { runCommands } from './tree/runs.js';
import { sheetCommands } from './tree/sheet.js';
import { signingInCommands } from './tree/signing-in.js';
import { syncCommands } from './tree/sync.js';
import { unitCommands } from './tree/unit.js';
import { commandsWithoutServer } from './tree/without-server.js';
import { workCommands } from './tree/work.js';
import { ownVersion } from './version.js';

/** One file a noun in `tree/`, in the order of the help text: each adds its commands to the program. */
const GROUPS = [
  signingInCommands,
  benchCommands,
  unitCommands,
  workCommands,
  runCommands,
  syncCommands,
  rigCommands,
  paperCommands,
  sheetCommands,
  peopleCommands,
  commandsWithoutServer,
  completionCommands,
] as const;

/** Reads the command line and does what it says. Gives the exit code; every error has been said by then. */
export async function runProgram(args: readonly string[], context: Context): Promise<number> {
  const outcome = { code: EXIT.good as number };
  const program = createProgram(context, (code) => (outcome.code = code));
  try {
    if (args.length === 0 && context.interactive && context.stderr.isTerminal)
      return await (await import('./menu/menu.js')).runMenu(context);
    await program.parseAsync([...args], { from: 'user' });
    return outcome.code;
  } catch (error) {
    if (error instanceof CommanderError)
      return error.code === 'commander.helpDisplayed' || error.code === 'commander.version' ? EXIT.good : EXIT.usage;
    return (await import('./report-error.js')).reportError(error, context);
  }
}

/** The commands. Each is loaded only when it runs, so that `--help` stays quick. */
export function createProgram(context: Context, done: (code: number) => void): Command {
  const program = new Command('refettle')
    .description('The bench companion of people who mend used household appliances.')
    .version(ownVersion(), '--version', 'print the version')
    .exitOverride()
    .showHelpAfterError('(refettle --help lists what there is)')
    .configureOutput({
      writeOut: (text) => context.stdout.write(text),
      writeErr: (text) => context.stderr.write(text),
      getOutHelpWidth: () => context.stdout.columns,
      getErrHelpWidth: () => context.stderr.columns,
      getOutHasColors: () => context.stdout.colourLevel > 0,
      getErrHasColors: () => context.stderr.colourLevel > 0,
    });
  const does: Does = (load) => async (options) => done(await (await load())(options, context));
  for (const addCommands of GROUPS) addCommands(program, does);
  return program;
}
