import { SHELL_SCRIPTS, type Shell } from '../completion/shells.js';
import type { Context } from '../context.js';
import { EXIT } from '../exit-codes.js';
import { printJson } from '../render/json.js';

/** Prints the script with which a shell completes `refettle`. */
export function runCompletion({ shell, json }: { shell: Shell; json?: boolean }, context: Context): Promise<number> {
  const script = SHELL_SCRIPTS[shell];
  if (json === true) printJson(context, { shell, script });
  else context.stdout.writeExactly(script);
  return Promise.resolve(EXIT.good);
}
