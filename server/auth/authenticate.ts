import type { NextFunction, Request, RequestHandler, Response } from 'express';
import { Passport } from 'passport';
import { Strategy as BearerStrategy } from 'passport-http-bearer';
import type { Action, Role } from '../../shared/api/roles.js';
import { mayDo, ROLES_BY_ACTION } from '../../shared/api/roles.js';
import type { AppDependencies } from '../app.js';
import { NotSignedInError, RoleError } from '../errors.js';
import { refuseOtherOrigin } from './origin.js';
import { sessionCookie } from './session-cookie.js';
import { personOfToken } from './session-store.js';

declare global {
  // eslint-disable-next-line @typescript-eslint/no-namespace -- passport's types are opened this way
  namespace Express {
    interface User {
      id: string;
      name: string;
      email: string;
      role: Role;
    }
  }
}

const BEARER = /^Bearer ([A-Za-z0-9._~+/=-]+)$/i;

/** The token that this request was let in by, and whether a cookie carried it. */
export function credentialOf(request: Request): { token: string; byCookie: boolean } | undefined {
  const header = request.get('authorization');
  if (header !== undefined) {
    const token = BEARER.exec(header)?.[1];
    return token === undefined ? undefined : { token, byCookie: false };
  }
  const token = sessionCookie(request);
  return token ? { token, byCookie: true } : undefined;
}

/** Lets in whoever may do the action, before anything of the body is read. */
export function authorise(deps: AppDependencies): (action: Action) => RequestHandler {
  const passport = new Passport();
  passport.use(
    new BearerStrategy((token, done) => {
      personOfToken(deps.db, token, deps.clock()).then((person) => {
        done(null, person ?? false);
      }, done);
    }),
  );
  const bearer = passport.authenticate('bearer', { session: false, failWithError: true }) as RequestHandler;

  return (action) => (request: Request, response: Response, next: NextFunction) => {
    // The strategy would take it from there; it would stand in every log on its way.
    if ('access_token' in request.query) throw new NotSignedInError('A token goes into the Authorization header, never into the address.');
    const allowed: readonly (Role | 'public')[] = ROLES_BY_ACTION[action];
    if (allowed.includes('public')) {
      next();
      return;
    }
    const credential = credentialOf(request);
    if (!credential) throw new NotSignedInError('Nobody is signed in.');
    if (credential.byCookie) {
      if (request.method !== 'GET' && request.method !== 'HEAD') refuseOtherOrigin(request, deps.config.publicUrl);
      request.headers.authorization = `Bearer ${credential.token}`;
    }
    bearer(request, response, (error?: unknown) => {
      if (error !== undefined && error !== null) {
        const refused = error instanceof Error && 'status' in error;
        next(refused ? new NotSignedInError('The sign-in is no longer good.') : error);
      } else if (!mayDo(request.user?.role, action)) {
        next(new RoleError(`This is for ${allowed.join(' or ')}; you are signed in as ${String(request.user?.role)}.`));
      } else next();
    });
  };
}
