import { parse as parseYaml } from 'yaml';
import { BadInputError } from '../../shared/errors.js';
import { checkScript } from '../../shared/script/check-script.js';
import { scriptSchema, type Script } from '../../shared/script/schema.js';
import type { Sheet } from '../../shared/sheet/schema.js';
import { readIfThere } from '../home.js';

/** The text of a file that must be there. */
export function textOf(file: string, what: string): string {
  const text = readIfThere(file);
  if (text === undefined) throw new BadInputError(`there is no such ${what}`, { file });
  return text;
}

/** Reads a bench script. Refuses (BadInputError) what is none, naming each fault and where it is. */
export function readScript(text: string, file: string): Script {
  let content: unknown;
  try {
    content = parseYaml(text);
  } catch (error) {
    throw new BadInputError(`the script is no YAML: ${error instanceof Error ? (error.message.split('\n')[0] ?? '') : ''}`, { file });
  }
  const parsed = scriptSchema.safeParse(content);
  if (parsed.success) return parsed.data;
  const faults = parsed.error.issues.map(({ path, message }) => `${path.length === 0 ? 'the file' : path.join('.')}: ${message}`);
  throw new BadInputError(`the script can't be used: ${faults.join('; ')}`, { file });
}

/** Refuses (BadInputError) a script that contradicts the sheet or itself: nothing of it runs. */
export function refuseFindings(script: Script, sheet: Sheet, file: string): void {
  const findings = checkScript(script, sheet);
  if (findings.length === 0) return;
  const said = findings.map(({ step, reason }) => `\n  ${step === undefined ? 'the script' : `step ${step}`}: ${reason}`);
  throw new BadInputError(`the script can't be run:${said.join('')}`, { file });
}
