import { benchView, joinedBench, type JoinedBench } from '../../bench/joined-bench.js';
import { keptSignOn } from '../../bench/kept-sign-on.js';
import { knownPeople } from '../../bench/known-people.js';
import { reportRigOf } from '../../bench/report-rig.js';
import type { Context } from '../../context.js';
import { UsageError } from '../../errors.js';
import { EXIT } from '../../exit-codes.js';
import { waitingEntries } from '../../journal/outbox.js';
import { printJson } from '../../render/json.js';
import { plural, timeText } from '../../render/words.js';

export function neededBench({ home, server }: Context): JoinedBench {
  const joined = joinedBench(home, server);
  if (!joined) throw new UsageError(`This computer is no shared bench at ${server}. To make it one: refettle bench join`);
  return joined;
}

/** What this shared bench is: its shop, its rig, who stands at it, whom it has seen, what waits on it. */
export async function runBenchShow({ json }: { json?: boolean }, context: Context): Promise<number> {
  const { bench } = neededBench(context);
  const { shop, people, offline } = await benchView(context);
  const rig = await reportRigOf(context);
  const standing = keptSignOn(context, bench.id);
  const known = knownPeople(context.home).map(({ person }) => person.id);
  const waiting = waitingEntries(context.home).entries.length;
  if (json === true) {
    printJson(context, {
      server: context.server,
      offline,
      bench,
      shop: shop.name,
      signedOn: standing ? { ...standing.person, until: standing.until.toISOString() } : null,
      people: people.map(({ id, name, role }) => ({ id, name, role, offline: known.includes(id) })),
      rig: rig ?? null,
      waiting,
    });
    return EXIT.good;
  }
  const { stdout, stderr } = context;
  stdout.write(`${bench.name}  ${shop.name}, at ${context.server}\n`);
  stdout.write(
    standing
      ? `signed on   ${standing.person.name}, ${standing.person.role}, until ${timeText(standing.until.toISOString())} unless going on\n`
      : 'signed on   nobody: whoever begins something is asked\n',
  );
  const names = people.map(({ id, name, role }) => `${name}, ${role}${known.includes(id) ? '' : ' (with the network only)'}`);
  stdout.write(`people      ${names.length > 0 ? names.join('\n            ') : 'nobody has signed on here yet'}\n`);
  stdout.write(
    `rig         ${rig ? `${rig.name}: ${rig.instruments.map(({ id, kind }) => `${id} (${kind})`).join(', ')}` : 'no rig file'}\n`,
  );
  stdout.write(`waits       ${waiting === 0 ? 'nothing' : `${plural(waiting, 'thing')}: refettle sync --status`}\n`);
  if (offline) stderr.say('The server can’t be reached now; this is from last time.');
  return EXIT.good;
}
