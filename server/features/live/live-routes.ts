import { InvalidError, NotFoundError } from '../../errors.js';
import { findUnit } from '../../history/unit-store.js';
import type { RegisterRoute, RegisterStream } from '../../route.js';
import type { AppDependencies } from '../../app.js';
import { unitNumberText } from '../../../shared/unit-number.js';
import { openStream } from './live-stream.js';
import { insertLive } from './live-store.js';

export function registerLiveRoutes(route: RegisterRoute, stream: RegisterStream, { db, live }: Pick<AppDependencies, 'db' | 'live'>): void {
  route('tellLive', async ({ body, person, bench, trx, now }) => {
    if (!(await findUnit(trx, body.unit))) throw new NotFoundError(`There is no unit ${unitNumberText(body.unit)}.`);
    refuseRowsOfOtherLength(body.messages);
    const { work, unit, messages } = body;
    const event = {
      kind: 'work',
      at: now.toISOString(),
      work,
      unit,
      by: { id: person.id, name: person.name, role: person.role },
      ...(bench === undefined ? {} : { bench: bench.name }),
      messages,
    } as const;
    return { taken: (await insertLive(trx, body, event)) ? 'now' : 'before' };
  });

  stream('hearLive', ({ query, http, stillAllowed }) =>
    openStream({
      hub: live,
      db,
      response: http.response,
      unit: query.unit,
      after: http.request.get('last-event-id') ?? query.after,
      stillAllowed,
    }),
  );
}

/** A page would draw lanes askew. */
function refuseRowsOfOtherLength(messages: readonly { kind: string; rows?: readonly (readonly number[])[] }[]): void {
  messages.forEach(({ rows = [] }, index) => {
    if (rows.some((row) => row.length !== rows[0]?.length))
      throw new InvalidError([
        { pointer: `/messages/${String(index)}/rows`, reason: 'rows of one message have a level for each lamp, all alike' },
      ]);
  });
}
