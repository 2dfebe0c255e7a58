import { BadInputError } from '../../../shared/errors.js';
import { checkScript } from '../../../shared/script/check-script.js';
import { checkSheet } from '../../../shared/sheet/check-sheet.js';
import { readSheet } from '../../../shared/sheet/read-sheet.js';
import type { Sheet } from '../../../shared/sheet/schema.js';
import { readScript, textOf } from '../../bench/read-script.js';
import type { Context } from '../../context.js';
import { EXIT } from '../../exit-codes.js';
import { wordsOf } from '../../report-error.js';
import { printJson } from '../../render/json.js';
import { plural } from '../../render/words.js';

interface Finding {
  severity: 'error' | 'warning';
  where: string;
  reason: string;
}

/** Whether a sheet, and a script that goes by it, hold together. Needs no server. */
export function runSheetCheck(
  { file, script, json }: { file: string; script?: string; json?: boolean },
  context: Context,
): Promise<number> {
  let sheet: Sheet;
  try {
    sheet = readSheet(textOf(file, 'service sheet'), file);
  } catch (error) {
    if (!(error instanceof BadInputError)) throw error;
    if (json === true)
      printJson(context, {
        file,
        good: false,
        findings: [{ severity: 'error', where: error.line === undefined ? '' : `line ${error.line}`, reason: error.message }],
      });
    context.stderr.say(wordsOf(error));
    return Promise.resolve(EXIT.badInput);
  }
  const findings: Finding[] = checkSheet(sheet).map(({ severity, path, reason }) => ({ severity, where: path.join('.'), reason }));
  if (script !== undefined) {
    const read = readScript(textOf(script, 'bench script'), script);
    findings.push(
      ...checkScript(read, sheet).map(({ step, reason }) => ({
        severity: 'error' as const,
        where: step === undefined ? script : `${script}, step ${step}`,
        reason,
      })),
    );
  }
  const good = findings.every(({ severity }) => severity === 'warning');
  if (json === true) printJson(context, { file, good, family: sheet.family, edition: sheet.edition, findings });
  else {
    for (const { severity, where, reason } of findings) context.stdout.write(`${severity}: ${where}: ${reason}\n`);
    if (good)
      context.stdout.write(
        `${sheet.title ?? sheet.family}, edition ${sheet.edition}: ${plural(sheet.lamps.length, 'lamp')}, ${plural(sheet.faults.length, 'fault')}, ${plural(sheet.checks.length, 'check')}. It holds together.\n`,
      );
  }
  return Promise.resolve(good ? EXIT.good : EXIT.badInput);
}
