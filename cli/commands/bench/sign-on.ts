import { keepSignOn, keptSignOn, signOnMinutes } from '../../bench/kept-sign-on.js';
import { askWho, signOnAs } from '../../bench/sign-on.js';
import type { Context } from '../../context.js';
import { EXIT } from '../../exit-codes.js';
import { firstLineOfInput } from '../../first-line.js';
import { printJson } from '../../render/json.js';
import { neededBench } from './show.js';

export interface BenchSignOnOptions {
  name?: string | undefined;
  pinStdin?: boolean;
  json?: boolean;
}

/** Signs on at this shared bench ahead of a command: for a pipe, or for somebody else than who stands here. */
export async function runBenchSignOn({ name, pinStdin, json }: BenchSignOnOptions, context: Context): Promise<number> {
  const joined = neededBench(context);
  const person =
    name === undefined
      ? await askWho(context, joined, 'command')
      : await signOnAs(
          context,
          { name },
          pinStdin === true
            ? await firstLineOfInput(context, { option: '--pin-stdin', what: 'PIN' })
            : await context.prompt.secret({ message: 'PIN', instead: 'give it on standard input with --pin-stdin' }),
        );
  keepSignOn(context, joined.bench.id, person);
  const until = keptSignOn(context, joined.bench.id)?.until;
  if (json === true) printJson(context, { bench: joined.bench, person, until: until?.toISOString() ?? null });
  else {
    context.stdout.write(`Signed on at ${joined.bench.name}: ${person.name}, ${person.role}.\n`);
    context.stderr.say(
      until === undefined
        ? 'This bench asks at each command (REFETTLE_SIGN_ON_MINUTES=0), so this sign-on ends here.'
        : `It holds for ${signOnMinutes(context)} minutes after the last command. A run asks at its start all the same. To end it: refettle sign-out`,
    );
  }
  return EXIT.good;
}
