import type { NextFunction, Request, RequestHandler, Response } from 'express';
import { Passport } from 'passport';
import { Strategy as BearerStrategy, type VerifyFunctionWithRequest } from 'passport-http-bearer';
import type { Action, Role } from '../../shared/api/roles.js';
import { benchMay, mayDo, ROLES_BY_ACTION } from '../../shared/api/roles.js';
import { PERSON_HEADER } from '../../shared/api/benches.js';
import type { AppDependencies } from '../app.js';
import { NotSignedInError, RoleError, SignOnError } from '../errors.js';
import { benchOfToken, isBenchToken, personAtBench, type BenchRef } from './bench-store.js';
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
    interface Request {
      /** The shared bench whose token this request came by; `user` is then who acts there, if anybody does. */
      bench?: BenchRef;
      /** Whether the browser sees us by https, whoever ends it. */
      overHttps: boolean;
    }
  }
}

/** What passport has for a user while a bench acts by itself; taken away again before anybody looks. */
const BENCH_ALONE: Express.User = { id: '', name: '', email: '', role: 'technician' };

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
    new BearerStrategy<VerifyFunctionWithRequest>({ passReqToCallback: true }, (request, token, done) => {
      const found = isBenchToken(token) ? benchAndPerson(deps, request, token) : personOfToken(deps.db, token, deps.clock());
      found.then((person) => {
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
      if (isBenchToken(credential.token)) throw new NotSignedInError('A bench’s token goes into the Authorization header only.');
      if (request.method !== 'GET' && request.method !== 'HEAD') refuseOtherOrigin(request, deps.config.publicUrl);
      request.headers.authorization = `Bearer ${credential.token}`;
    }
    bearer(request, response, (error?: unknown) => {
      if (error !== undefined && error !== null) {
        const refused = error instanceof Error && 'status' in error;
        next(refused ? new NotSignedInError('The sign-in is no longer good.') : error);
        return;
      }
      try {
        if (request.bench) mayActAtBench(request, action);
        else mayActAsOneself(request, action);
        next();
      } catch (refusal) {
        next(refusal);
      }
    });
  };
}

/** The bench of a token, put down in the request, and who acts there by the header. Refuses a bench that was revoked, and strangers. */
async function benchAndPerson(deps: AppDependencies, request: Request, token: string): Promise<Express.User> {
  const bench = await benchOfToken(deps.db, token, deps.clock());
  if (!bench)
    throw new NotSignedInError(
      'This bench’s token is no longer good: it was revoked, or the bench was given a new one. A lead or an admin gives it a new one.',
    );
  request.bench = bench;
  const personId = request.get(PERSON_HEADER);
  if (personId === undefined) return BENCH_ALONE;
  const person = await personAtBench(deps.db, bench.id, personId.trim());
  if (!person) throw new SignOnError(`Whoever recorded it has never signed on at ${bench.name}.`);
  if (!person.active) throw new RoleError(`${person.user.name} no longer works here, so nothing more is taken down in that name.`);
  return person.user;
}

function mayActAtBench(request: Request, action: Action): void {
  const may = benchMay(action);
  const alone = request.user === BENCH_ALONE;
  if (alone) delete request.user;
  if (may === undefined) throw new RoleError('This is not done by a shared bench: sign in with your own account, in a browser.');
  if (may === 'person' && alone) throw new NotSignedInError('Nobody has signed on at this bench.');
  // A bench reads whatever role stands at it.
  if (may === 'person') mayActAsOneself(request, action);
}

function mayActAsOneself(request: Request, action: Action): void {
  const allowed: readonly (Role | 'public')[] = ROLES_BY_ACTION[action];
  if (!mayDo(request.user?.role, action))
    throw new RoleError(
      allowed.length === 0
        ? 'This is for the token of a shared bench.'
        : `This is for ${allowed.join(' or ')}; you are ${request.bench ? 'signed on' : 'signed in'} as ${String(request.user?.role)}.`,
    );
  const claimed = request.get(PERSON_HEADER);
  if (claimed !== undefined && claimed.trim().toLowerCase() !== request.user?.id)
    throw new RoleError(`The header ${PERSON_HEADER} names somebody else than who is signed in: only a shared bench acts for several.`);
}
