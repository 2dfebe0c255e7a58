import type { Context } from '../context.js';
import { EXIT } from '../exit-codes.js';
import { printJson } from '../render/json.js';
import { whoIsHere } from '../session.js';

/** Who is signed in on this bench. */
export async function runWhoami(options: { json?: boolean | undefined }, context: Context): Promise<number> {
  const { user, shop, offline } = await whoIsHere(context);
  if (options.json === true) printJson(context, { server: context.server, offline, user, shop });
  else {
    context.stdout.write(`${user.name}, ${user.role}, ${user.email}\n${shop.name}, at ${context.server}\n`);
    if (offline) context.stderr.say('The server can’t be reached now; this is from last time.');
  }
  return EXIT.good;
}
