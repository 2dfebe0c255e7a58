import { Argument, type Command } from 'commander';
import type { Shell } from '../completion/shells.js';
import { JSON_OPTION, type Does } from './parts.js';

const SHELLS: readonly Shell[] = ['bash', 'zsh', 'fish'];
const HOW = `
  bash   in ~/.bashrc: source <(refettle completion bash)
  zsh    in ~/.zshrc, behind compinit: source <(refettle completion zsh)
  fish   refettle completion fish > ~/.config/fish/completions/refettle.fish`;

/** Completion in the shell. */
export function completionCommands(program: Command, does: Does): void {
  program.commandsGroup('In the shell:');
  program
    .command('completion')
    .description('print what completes commands, options and units in your shell')
    .addArgument(new Argument('<shell>', 'the shell').choices(SHELLS))
    .option(...JSON_OPTION)
    .addHelpText('after', HOW)
    .action((shell: Shell, options: { json?: boolean }) =>
      does(async () => (await import('../commands/completion.js')).runCompletion)({ ...options, shell }),
    );
  // What the shells' scripts ask, at each press of Tab.
  program
    .command('__complete', { hidden: true })
    .addArgument(new Argument('<shell>').choices(SHELLS))
    .argument('[words...]')
    .action((shell: Shell, words: string[]) =>
      does(async () => {
        const { answerShell } = await import('../completion/answer.js');
        return (_options: object, context) => Promise.resolve(answerShell(program, shell, words, context));
      })({}),
    );
}
