import type { Request, RequestHandler } from 'express';
import type { MadeLink } from '../../../shared/api/people.js';
import type { AppDependencies } from '../../app.js';
import { credentialOf } from '../../auth/authenticate.js';
import { ownOrigin } from '../../auth/origin.js';
import { listPeople, lockPeople, readPersonRow } from '../../auth/people-store.js';
import { readShop } from '../../history/shop-store.js';
import { isLoopback } from '../../loopback.js';
import { cursorOf, pageOf, uuidCursor } from '../../paging.js';
import type { RegisterRoute } from '../../route.js';
import {
  activate,
  changePassword,
  changeRole,
  createPerson,
  deactivate,
  invite,
  linkFor,
  lookAtLink,
  setPasswordByLink,
} from './people-service.js';

export function registerPeopleRoutes(
  route: RegisterRoute,
  deps: Pick<AppDependencies, 'config'>,
  limits: Record<'ownPassword' | 'personLink', RequestHandler[]>,
): void {
  const { publicUrl, publicListener } = deps.config;

  /**
   * The address by which the admin has just reached us; only where that is this machine's own, the public one, unless that shows nothing
   * but tags. The token stands behind `#`: what stands there, no browser sends and no proxy logs.
   */
  const linkOf = ({ token, person, kind, expiresAt }: Awaited<ReturnType<typeof linkFor>>, request: Request): MadeLink => {
    const own = ownOrigin(request, publicUrl);
    const base = isLoopback(own) && publicUrl !== undefined && publicListener === undefined ? publicUrl.replace(/\/+$/, '') : own;
    return { person, link: { url: `${base}/link#${token}`, kind, expiresAt: expiresAt.toISOString(), onlyHere: isLoopback(base) } };
  };

  route('listPeople', async ({ query, trx, now }) => {
    const people = await listPeople(trx, uuidCursor(query.cursor), query.limit + 1, now);
    return pageOf(people, query.limit, (person) => cursorOf(person.id));
  });

  route('getPerson', ({ params, trx, now }) => readPersonRow(trx, params.id, now));

  route('createPerson', ({ body, person: who, trx, now }) => createPerson(trx, body, { who, now }));

  route('invitePerson', async ({ body, person: who, trx, now, http }) => linkOf(await invite(trx, body, { who, now }), http.request));

  route('makeLink', async ({ params, person: who, trx, now, http }) => linkOf(await linkFor(trx, params.id, { who, now }), http.request));

  route('changeRole', ({ params, body, person: who, trx, now }) => changeRole(trx, params.id, body.role, { who, now }), {
    first: lockPeople,
  });

  route('deactivatePerson', ({ params, body, person: who, trx, now }) => deactivate(trx, params.id, body.reason, { who, now }), {
    first: lockPeople,
  });

  route('activatePerson', ({ params, person: who, trx, now }) => activate(trx, params.id, { who, now }));

  route(
    'changePassword',
    async ({ body, person: who, trx, now, ifRefused, http }) => ({
      ended: await changePassword(trx, body, { who, now, token: credentialOf(http.request)?.token, ifRefused }),
    }),
    { limits: limits.ownPassword },
  );

  route(
    'lookAtLink',
    async ({ body, trx, now }) => {
      const { link, person } = await lookAtLink(trx, body.token, now);
      const shop = await readShop(trx);
      return { name: person.name, email: person.email, kind: link.kind, shop: shop.name, expiresAt: link.expiresAt.toISOString() };
    },
    { limits: limits.personLink },
  );

  route('useLink', ({ body, trx, now }) => setPasswordByLink(trx, body.token, body.password, now), { limits: limits.personLink });
}
