import type { Context } from '../../context.js';
import { EXIT } from '../../exit-codes.js';
import { table } from '../../render/columns.js';
import { printJson } from '../../render/json.js';
import { dayText, timeText } from '../../render/words.js';
import { everybody } from './find-person.js';

/** The people of the shop: role, whether they can sign in, when they were last here. */
export async function runPersonList({ json }: { json?: boolean }, context: Context): Promise<number> {
  const people = await everybody(await context.api());
  if (json === true) {
    printJson(context, { items: people });
    return EXIT.good;
  }
  const style = await context.stdout.style();
  const head = ['Name', 'E-mail', 'Role', 'State', 'Last here'].map((title) => style.ink.bold(title));
  const rows = people.map(({ name, email, role, state, link, lastUsedAt }) => [
    name,
    email,
    role,
    state === 'active' && link ? 'active, has a link' : state === 'invited' && !link ? 'invited, link ran out' : state,
    lastUsedAt === undefined ? 'not lately' : `${dayText(lastUsedAt)}, ${timeText(lastUsedAt)}`,
  ]);
  context.stdout.write(`${table([head, ...rows], style).join('\n')}\n`);
  return EXIT.good;
}
