import type { SessionRow } from '../../../shared/api/people.js';
import type { Api } from '../../api/api-client.js';
import type { Context } from '../../context.js';
import { EXIT } from '../../exit-codes.js';
import { table } from '../../render/columns.js';
import { printJson } from '../../render/json.js';
import { dayText, timeText } from '../../render/words.js';
import { findPerson } from '../person/find-person.js';

const LARGEST_PAGE = 200;

/** Every session that could be used now: of somebody else (an admin), or one's own. */
export async function sessionsOf(api: Api, personId: string | undefined): Promise<SessionRow[]> {
  const sessions: SessionRow[] = [];
  let cursor: string | undefined;
  do {
    const query = { limit: LARGEST_PAGE, cursor };
    const page = await (personId === undefined
      ? api.call('listOwnSessions', { query })
      : api.call('listSessions', { params: { id: personId }, query }));
    sessions.push(...page.items);
    cursor = page.next;
  } while (cursor !== undefined);
  return sessions;
}

/** Where somebody is signed in, newest first. */
export async function runSessionList({ person, json }: { person?: string; json?: boolean }, context: Context): Promise<number> {
  const api = await context.api();
  const sessions = await sessionsOf(api, person === undefined ? undefined : (await findPerson(api, person)).id);
  if (json === true) {
    printJson(context, { items: sessions });
    return EXIT.good;
  }
  if (sessions.length === 0) {
    context.stderr.write('Signed in nowhere.\n');
    return EXIT.good;
  }
  const style = await context.stdout.style();
  const when = (iso: string): string => `${dayText(iso)}, ${timeText(iso)}`;
  const head = ['Session', 'From', 'Last used', 'Until'].map((title) => style.ink.bold(title));
  const rows = sessions.map(({ id, from, lastUsedAt, createdAt, expiresAt, current }) => [
    id.slice(-SHORT_ID),
    current ? `${from} (this one)` : from,
    when(lastUsedAt ?? createdAt),
    dayText(expiresAt),
  ]);
  context.stdout.write(`${table([head, ...rows], style).join('\n')}\n`);
  return EXIT.good;
}

/** The end of an id: its beginning is the time, which sessions of one morning share. */
export const SHORT_ID = 8;
