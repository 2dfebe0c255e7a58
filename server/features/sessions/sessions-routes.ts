import type { RequestHandler } from 'express';
import { v7 as newId } from 'uuid';
import type { AppDependencies } from '../../app.js';
import { credentialOf } from '../../auth/authenticate.js';
import { useFirstAdminLink } from '../../auth/first-admin.js';
import { refuseOtherOrigin } from '../../auth/origin.js';
import { hashPassword } from '../../auth/password.js';
import { insertPerson } from '../../auth/people-store.js';
import { clearSessionCookie, setSessionCookie } from '../../auth/session-cookie.js';
import { revokeSession } from '../../auth/session-store.js';
import { NotSignedInError } from '../../errors.js';
import { readShop } from '../../history/shop-store.js';
import type { RegisterRoute } from '../../route.js';
import { signIn } from './sessions-service.js';

export function registerSessionRoutes(
  route: RegisterRoute,
  deps: AppDependencies,
  limits: Record<'signIn' | 'firstAdmin', RequestHandler[]>,
): void {
  const { publicUrl } = deps.config;

  route(
    'signIn',
    async ({ body, trx, now, http: { request, response } }) => {
      // Else another site could sign a browser in as somebody else.
      if (body.keep === 'cookie' && (request.get('origin') ?? request.get('sec-fetch-site')) !== undefined)
        refuseOtherOrigin(request, publicUrl);
      const { token, user, expiresAt } = await signIn(trx, body, now);
      request.log.info({ person: user.id, keep: body.keep ?? 'bearer' }, 'signed in');
      if (body.keep !== 'cookie') return { token, user };
      setSessionCookie(request, response, publicUrl, token, expiresAt);
      return { user };
    },
    { limits: limits.signIn },
  );

  route('signOut', async ({ trx, now, http: { request, response } }) => {
    const credential = credentialOf(request);
    if (credential) await revokeSession(trx, credential.token, now);
    clearSessionCookie(request, response, publicUrl);
    return {};
  });

  route(
    'createFirstAdmin',
    async ({ body, trx, now }) => {
      if (!(await useFirstAdminLink(trx, body.token, now)))
        throw new NotSignedInError('This link is used up, too old, or none of ours. The terminal prints a new one at the next start.');
      const person = { id: newId(), email: body.email, name: body.name, role: 'admin' as const };
      await insertPerson(trx, { ...person, passwordHash: await hashPassword(body.password), createdAt: now });
      return person;
    },
    { limits: limits.firstAdmin },
  );

  route('me', async ({ person, trx }) => ({ user: person, shop: await readShop(trx) }));
}
