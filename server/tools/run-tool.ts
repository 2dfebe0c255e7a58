import { isAbsolute, resolve } from 'node:path';
import { parseArgs, type ParseArgsConfig } from 'node:util';
import { SetUpError } from '../set-up-error.js';

interface Tool<Options extends NonNullable<ParseArgsConfig['options']>> {
  /** What `--help` prints. */
  help: string;
  options: Options;
  run: (values: Record<string, string | boolean | undefined>, positionals: string[]) => Promise<void>;
}

const EXIT_USAGE = 2;

/** What npm run backup, restore and rotate-key have in common: answers on standard output, faults on standard error with what to do. */
export async function runTool<Options extends NonNullable<ParseArgsConfig['options']>>({
  help,
  options,
  run,
}: Tool<Options>): Promise<void> {
  try {
    let read: { values: Record<string, string | boolean | undefined>; positionals: string[] };
    try {
      const { values, positionals } = parseArgs({ options: { ...options, help: { type: 'boolean' } }, allowPositionals: true });
      read = { values: values, positionals };
    } catch (error) {
      process.stderr.write(`${(error as Error).message}\n${help}`);
      process.exitCode = EXIT_USAGE;
      return;
    }
    if (read.values['help']) process.stdout.write(help);
    else await run(read.values, read.positionals);
  } catch (error) {
    process.stderr.write(
      error instanceof SetUpError
        ? `${error.message}\nWhat to do: ${error.remedy}\n`
        : `${error instanceof Error ? String(error.stack) : String(error)}\n`,
    );
    process.exitCode = 1;
  }
}

/** npm runs its scripts in the checkout; a person means the folder that they stand in. */
export const fromHere = (path: string): string => (isAbsolute(path) ? path : resolve(process.env['INIT_CWD'] ?? process.cwd(), path));

export const say = (...lines: string[]): void => void process.stdout.write(`${lines.join('\n')}\n`);
