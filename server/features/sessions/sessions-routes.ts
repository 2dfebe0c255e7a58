import type { Request, RequestHandler } from 'express';
import { v7 as newId } from 'uuid';
import type { AppDependencies } from '../../app.js';
import { credentialOf } from '../../auth/authenticate.js';
import { useFirstAdminLink } from '../../auth/first-admin.js';
import { refuseOtherOrigin } from '../../auth/origin.js';
import { hashPassword } from '../../auth/password.js';
import { insertPerson, readPersonRow } from '../../auth/people-store.js';
import { clearSessionCookie, setSessionCookie } from '../../auth/session-cookie.js';
import { listSessions, revokeSessionOfToken } from '../../auth/session-store.js';
import { usedFrom } from '../../auth/used-from.js';
import type { Db } from '../../db.js';
import { NotSignedInError } from '../../errors.js';
import { audit, personSubject } from '../../history/audit.js';
import { readShop } from '../../history/shop-store.js';
import { refOf } from '../../history/unit-history.js';
import { cursorOf, pageOf, uuidCursor } from '../../paging.js';
import type { RegisterRoute } from '../../route.js';
import { endSession, endSessions, signIn } from './sessions-service.js';

export function registerSessionRoutes(
  route: RegisterRoute,
  deps: AppDependencies,
  limits: Record<'signIn' | 'firstAdmin', RequestHandler[]>,
): void {
  const { publicUrl } = deps.config;

  route(
    'signIn',
    async ({ body, trx, now, ifRefused, http: { request, response } }) => {
      // Else another site could sign a browser in as somebody else.
      if (body.keep === 'cookie' && (request.get('origin') ?? request.get('sec-fetch-site')) !== undefined)
        refuseOtherOrigin(request, publicUrl);
      const { token, user, expiresAt } = await signIn(trx, { request: body, from: usedFrom(request), now, ifRefused });
      request.log.info({ person: user.id, keep: body.keep ?? 'bearer' }, 'signed in');
      if (body.keep !== 'cookie') return { token, user };
      setSessionCookie(request, response, token, expiresAt);
      return { user };
    },
    { limits: limits.signIn },
  );

  route('signOut', async ({ person, trx, now, http: { request, response } }) => {
    const credential = credentialOf(request);
    if (credential) await revokeSessionOfToken(trx, credential.token, now);
    const after = { from: usedFrom(request) };
    await audit(trx, { who: refOf(person), what: 'session.ended', subject: personSubject(person), after, at: now });
    clearSessionCookie(request, response);
    return {};
  });

  route(
    'createFirstAdmin',
    async ({ body, trx, now }) => {
      if (!(await useFirstAdminLink(trx, body.token, now)))
        throw new NotSignedInError('This link is used up, too old, or none of ours. The terminal prints a new one at the next start.');
      const person = { id: newId(), email: body.email, name: body.name, role: 'admin' as const };
      await insertPerson(trx, { ...person, passwordHash: await hashPassword(body.password), createdAt: now });
      const after = { email: person.email, role: person.role };
      await audit(trx, { who: undefined, what: 'first-admin.created', subject: personSubject(person), after, at: now });
      return person;
    },
    { limits: limits.firstAdmin },
  );

  const sessionsOf = async (
    personId: string,
    { query, trx, now, http }: { query: { cursor?: string | undefined; limit: number }; trx: Db; now: Date; http: { request: Request } },
  ) => {
    const asks = { token: credentialOf(http.request)?.token, after: uuidCursor(query.cursor), limit: query.limit + 1, now };
    return pageOf(await listSessions(trx, personId, asks), query.limit, (session) => cursorOf(session.id));
  };

  route('listOwnSessions', (context) => sessionsOf(context.person.id, context));
  route('listSessions', async (context) => sessionsOf((await readPersonRow(context.trx, context.params.id, context.now)).id, context));

  route('revokeOwnSession', async ({ params, person: who, trx, now }) => {
    await endSession(trx, { id: params.session, owner: who }, { who, now });
    return {};
  });
  route('revokeSession', async ({ params, person: who, trx, now }) => {
    await endSession(trx, { id: params.session, owner: await readPersonRow(trx, params.id, now) }, { who, now });
    return {};
  });
  route('revokeOtherSessions', async ({ person: who, trx, now, http }) => ({
    ended: await endSessions(trx, who, { who, now, but: credentialOf(http.request)?.token }),
  }));
  route('revokeSessions', async ({ params, person: who, trx, now }) => ({
    ended: await endSessions(trx, await readPersonRow(trx, params.id, now), { who, now }),
  }));

  route('me', async ({ person, trx }) => ({ user: person, shop: await readShop(trx) }));
}
