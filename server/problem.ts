import type { ErrorRequestHandler, Request } from 'express';
import { PROBLEM_TYPE_PREFIX, type Problem, type ProblemKind } from '../shared/api/problem.js';
import { BadInputError } from '../shared/errors.js';
import {
  ConflictError,
  GateError,
  InvalidError,
  MalformedError,
  NotFoundError,
  NotSignedInError,
  OriginError,
  RoleError,
  SameSerialError,
  SignOnError,
  TooManyError,
} from './errors.js';

const TITLES: Record<ProblemKind, string> = {
  'not-signed-in': 'Sign in first',
  role: 'Not yours to do',
  'sign-on': 'Sign on at the bench first',
  origin: 'The request came from another site',
  gate: 'A gate is shut',
  'not-found': 'Not there',
  conflict: 'It contradicts what is stored',
  'same-serial': 'This serial number is on the books',
  malformed: 'The request can’t be read',
  invalid: 'Some of it can’t be used',
  'too-many': 'Too many tries',
  fault: 'A fault of Refettle itself',
};

/** RFC 9457: an error as it goes over HTTP. */
export const PROBLEM_MEDIA_TYPE = 'application/problem+json';

const problem = (status: number, kind: ProblemKind, rest: Omit<Problem, 'type' | 'title' | 'status'> = {}): Problem => ({
  type: `${PROBLEM_TYPE_PREFIX}${kind}`,
  title: TITLES[kind],
  status,
  ...rest,
});

/** The one place where an error becomes an answer. Undefined: it is a fault of ours, and nothing of it is shown. */
export function problemOf(error: unknown): Problem | undefined {
  if (error instanceof NotSignedInError)
    return problem(401, 'not-signed-in', { detail: error.message, remedy: 'Sign in, and send the token in the Authorization header.' });
  if (error instanceof RoleError) return problem(403, 'role', { detail: error.message });
  if (error instanceof SignOnError)
    return problem(403, 'sign-on', {
      detail: error.message,
      remedy: 'That person signs on at this bench once, by name and PIN: refettle bench sign-on',
    });
  if (error instanceof OriginError) return problem(403, 'origin', { detail: error.message });
  if (error instanceof GateError) {
    const errors = error.reasons.map((reason) => ({ pointer: '', reason }));
    return problem(403, 'gate', {
      detail: `${error.message}: ${error.reasons.join('; ')}`,
      errors,
      ...(error.remedy === undefined ? {} : { remedy: error.remedy }),
    });
  }
  if (error instanceof NotFoundError) return problem(404, 'not-found', { detail: error.message });
  if (error instanceof ConflictError)
    return problem(409, 'conflict', { detail: error.message, ...(error.remedy === undefined ? {} : { remedy: error.remedy }) });
  if (error instanceof SameSerialError) {
    return problem(409, 'same-serial', {
      detail: error.message,
      units: error.units,
      remedy:
        'Compare the rating plates. If it is taken in all the same, say why: bought back, plate unreadable, other (sameSerialReason).',
    });
  }
  if (error instanceof InvalidError) return problem(422, 'invalid', { detail: error.message, errors: [...error.faults] });
  if (error instanceof BadInputError) {
    const reason = error.line === undefined ? error.message : `line ${String(error.line)}: ${error.message}`;
    return problem(422, 'invalid', { detail: reason, errors: [{ pointer: '', reason }] });
  }
  if (error instanceof MalformedError) return problem(error.status, 'malformed', { detail: error.message });
  if (error instanceof TooManyError) {
    return problem(429, 'too-many', { detail: error.message, remedy: `Try again in ${String(error.retryAfterSeconds)} seconds.` });
  }
  if (isDatabaseAway(error)) {
    return problem(503, 'fault', {
      detail: 'The database does not answer.',
      remedy: 'Look at the server’s terminal. What a bench recorded stays on the bench and is sent later.',
    });
  }
  return malformedByExpress(error);
}

/** PostgreSQL's classes 08 (connection) and 57P (shut down, starting up), and what the socket and the pool say when there is none. */
const DATABASE_AWAY = /^(08\w{3}|57P0[123]|ECONNREFUSED|ECONNRESET|ENOTFOUND|EPIPE|ETIMEDOUT)$/;

function isDatabaseAway(error: unknown): boolean {
  if (error instanceof AggregateError) return error.errors.some(isDatabaseAway);
  if (!(error instanceof Error)) return false;
  const code = 'code' in error ? String(error.code) : '';
  return DATABASE_AWAY.test(code) || error.name === 'KnexTimeoutError' || error.message.startsWith('Connection terminated');
}

/** What Express and its body parser refuse by themselves: they say so by a status below 500. */
function malformedByExpress(error: unknown): Problem | undefined {
  if (!(error instanceof Error) || !('status' in error) || typeof error.status !== 'number') return undefined;
  if (error.status === 413) return problem(413, 'malformed', { detail: 'The request is larger than the server takes.' });
  if (error.status === 415) return problem(415, 'malformed', { detail: 'The request’s encoding is not known here: send UTF-8 JSON.' });
  if (error.status >= 400 && error.status < 500)
    return problem(400, 'malformed', {
      detail: error instanceof SyntaxError ? 'The request’s body is no JSON.' : 'The request can’t be read.',
    });
  return undefined;
}

const idOf = (request: Request): string => (typeof request.id === 'string' ? request.id : 'unknown');

/** The last handler of the app. A fault of ours is logged whole under an opaque id, and only the id leaves. */
export const sendProblem: ErrorRequestHandler = (error: unknown, request, response, next) => {
  if (response.headersSent) {
    next(error);
    return;
  }
  const known = problemOf(error);
  if (known === undefined) request.log.error({ err: error }, 'fault');
  const answer =
    known ?? problem(500, 'fault', { detail: `It is in the server’s log as ${idOf(request)}.`, instance: `urn:uuid:${idOf(request)}` });
  if (answer.status === 401) response.set('WWW-Authenticate', 'Bearer realm="refettle"');
  if (error instanceof TooManyError) response.set('Retry-After', String(error.retryAfterSeconds));
  response.status(answer.status).type(PROBLEM_MEDIA_TYPE).send(JSON.stringify(answer));
};
