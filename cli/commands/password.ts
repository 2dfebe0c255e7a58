import type { Context } from '../context.js';
import { NobodyToAskError, UsageError } from '../errors.js';
import { EXIT } from '../exit-codes.js';
import { printJson } from '../render/json.js';
import { plural } from '../render/words.js';

/** Changes the own password; every other session of one's own ends. */
export async function runPassword({ stdin, json }: { stdin?: boolean; json?: boolean }, context: Context): Promise<number> {
  const { oldPassword, newPassword } = stdin === true ? await twoLines(context) : await asked(context);
  const { ended } = await (await context.api()).call('changePassword', { body: { oldPassword, newPassword } });
  if (json === true) printJson(context, { changed: true, sessionsEnded: ended });
  else context.stdout.write(`The password is changed.${ended === 0 ? '' : ` Ended ${plural(ended, 'other session')} of yours.`}\n`);
  return EXIT.good;
}

async function asked({ prompt }: Context): Promise<{ oldPassword: string; newPassword: string }> {
  const instead = 'give the old and the new one as two lines on standard input, with --stdin';
  const oldPassword = await prompt.secret({ message: 'Old password', instead });
  const newPassword = await prompt.secret({ message: 'New password, at least 12 characters', instead });
  const again = await prompt.secret({ message: 'The new one again', instead });
  if (again !== newPassword) throw new UsageError('The new password was typed in two ways. Nothing is changed.');
  return { oldPassword, newPassword };
}

async function twoLines({ stdin, interactive }: Context): Promise<{ oldPassword: string; newPassword: string }> {
  if (interactive) throw new NobodyToAskError('--stdin reads a pipe.', 'leave it out to be asked for the passwords');
  let text = '';
  for await (const chunk of stdin as AsyncIterable<Buffer | string>) {
    text += chunk.toString();
    if (text.split('\n').length > 2) break;
  }
  const [oldPassword = '', newPassword = ''] = text.split(/\r?\n/);
  if (oldPassword === '' || newPassword === '')
    throw new UsageError('Standard input holds the old password on its first line and the new one on its second.');
  return { oldPassword, newPassword };
}
