import type { PersonRow } from '../../../shared/api/people.js';
import type { Context } from '../../context.js';
import { EXIT } from '../../exit-codes.js';
import { table, widthOf } from '../../render/columns.js';
import { printJson } from '../../render/json.js';
import { dayText } from '../../render/words.js';
import { everybody } from './find-person.js';

/** The people of the shop: role, whether they can sign in, when they were last here. */
export async function runPersonList({ json }: { json?: boolean }, context: Context): Promise<number> {
  const people = await everybody(await context.api());
  if (json === true) {
    printJson(context, { items: people });
    return EXIT.good;
  }
  const style = await context.stdout.style();
  const head = ['Name', 'Role', 'State', 'Last here', 'E-mail'].map((title) => style.ink.bold(title));
  const rows = people.map((person) => [
    person.name,
    person.role,
    stateText(person),
    person.lastUsedAt === undefined ? 'not lately' : dayText(person.lastUsedAt),
    person.email,
  ]);
  const wide = table([head, ...rows], style);
  // Where it is too wide, the addresses go on lines of their own.
  const fits = wide.every((line) => widthOf(line) <= context.stdout.columns);
  const narrow = table([head.slice(0, -1), ...rows.map((row) => row.slice(0, -1))], style);
  const lines = fits ? wide : narrow.flatMap((line, index) => (index === 0 ? [line] : [line, `  ${people[index - 1]?.email ?? ''}`]));
  context.stdout.write(`${lines.join('\n')}\n`);
  return EXIT.good;
}

function stateText({ state, link }: PersonRow): string {
  if (state === 'active' && link) return 'active, has a link';
  return state === 'invited' && !link ? 'invited, link ran out' : state;
}
