import type { Context } from '../context.js';
import { NobodyToAskError, UsageError } from '../errors.js';
import { EXIT } from '../exit-codes.js';
import { keepSession } from '../session.js';
import { printJson } from '../render/json.js';

export interface SignInOptions {
  email?: string | undefined;
  passwordStdin?: boolean | undefined;
  json?: boolean | undefined;
}

/** Signs in and keeps the token on this bench, for its owner's eyes only. */
export async function runSignIn(options: SignInOptions, context: Context): Promise<number> {
  const email = options.email ?? (await context.prompt.text({ message: 'E-mail address', instead: 'give it with --email' }));
  const password =
    options.passwordStdin === true
      ? await firstLine(context)
      : await context.prompt.secret({ message: 'Password', instead: 'give it on standard input with --password-stdin' });
  const { token, user } = await (await context.api()).call('signIn', { body: { email, password } });
  if (token === undefined) throw new UsageError('The server gave no token');
  keepSession(context.home, { server: context.server, token, user });
  if (options.json === true) printJson(context, { server: context.server, user });
  else context.stdout.write(`Signed in at ${context.server} as ${user.name}, ${user.role}.\n`);
  return EXIT.good;
}

async function firstLine({ stdin, interactive }: Context): Promise<string> {
  if (interactive) throw new NobodyToAskError('--password-stdin reads a pipe.', 'leave it out to be asked for the password');
  let text = '';
  for await (const chunk of stdin as AsyncIterable<Buffer | string>) {
    text += chunk.toString();
    if (text.includes('\n')) break;
  }
  const line = text.split(/\r?\n/, 1)[0] ?? '';
  if (line === '') throw new UsageError('Standard input holds no password.');
  return line;
}
