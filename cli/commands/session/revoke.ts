import { BadInputError } from '../../../shared/errors.js';
import type { Context } from '../../context.js';
import { UsageError } from '../../errors.js';
import { EXIT } from '../../exit-codes.js';
import { printJson } from '../../render/json.js';
import { plural } from '../../render/words.js';
import { findPerson } from '../person/find-person.js';
import { sessionsOf, SHORT_ID } from './list.js';

export interface RevokeOptions {
  session?: string;
  person?: string;
  all?: boolean;
  json?: boolean;
}

/** Ends one session by its id or the end of it, or with --all: of somebody else every one, of one's own every other one. */
export async function runSessionRevoke({ session, person, all, json }: RevokeOptions, context: Context): Promise<number> {
  if ((session === undefined) === (all !== true)) throw new UsageError('Say which session ends (refettle session list), or --all.');
  const api = await context.api();
  const owner = person === undefined ? undefined : (await findPerson(api, person)).id;
  let ended = 1;
  if (session === undefined) {
    ({ ended } = owner === undefined ? await api.call('revokeOtherSessions') : await api.call('revokeSessions', { params: { id: owner } }));
  } else {
    const wanted = session.toLowerCase();
    const found = (await sessionsOf(api, owner)).filter(({ id }) => id === wanted || (wanted.length >= SHORT_ID && id.endsWith(wanted)));
    const [one, ...others] = found;
    if (!one || others.length > 0)
      throw new BadInputError(`there is no session ${session}: refettle session list shows them, and where each is used`);
    const params = { session: one.id };
    await (owner === undefined
      ? api.call('revokeOwnSession', { params })
      : api.call('revokeSession', { params: { ...params, id: owner } }));
  }
  if (json === true) printJson(context, { ended });
  else context.stdout.write(ended === 0 ? 'There was none to end.\n' : `Ended ${plural(ended, 'session')}.\n`);
  return EXIT.good;
}
