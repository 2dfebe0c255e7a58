import { joinedBench } from '../bench/joined-bench.js';
import type { Context } from '../context.js';
import { UsageError } from '../errors.js';
import { EXIT } from '../exit-codes.js';
import { firstLineOfInput } from '../first-line.js';
import { keepSession } from '../session.js';
import { printJson } from '../render/json.js';

export interface SignInOptions {
  email?: string | undefined;
  passwordStdin?: boolean | undefined;
  json?: boolean | undefined;
}

/** Signs in and keeps the token on this bench, for its owner's eyes only. */
export async function runSignIn(options: SignInOptions, context: Context): Promise<number> {
  const joined = joinedBench(context.home, context.server);
  if (joined)
    throw new UsageError(
      `This computer is the shared bench ${joined.bench.name}: nobody signs in on it by an account of their own. Sign on by name and PIN: refettle bench sign-on`,
    );
  const email = options.email ?? (await context.prompt.text({ message: 'E-mail address', instead: 'give it with --email' }));
  const password =
    options.passwordStdin === true
      ? await firstLineOfInput(context, { option: '--password-stdin', what: 'password' })
      : await context.prompt.secret({ message: 'Password', instead: 'give it on standard input with --password-stdin' });
  const { token, user } = await (await context.api()).call('signIn', { body: { email, password } });
  if (token === undefined) throw new UsageError('The server gave no token');
  keepSession(context.home, { server: context.server, token, user });
  if (options.json === true) printJson(context, { server: context.server, user });
  else context.stdout.write(`Signed in at ${context.server} as ${user.name}, ${user.role}.\n`);
  return EXIT.good;
}
