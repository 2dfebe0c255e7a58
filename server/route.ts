import { Readable } from 'node:stream';
import { pipeline } from 'node:stream/promises';
import { ServerResponse } from 'node:http';
import express, { type Express, type Request, type RequestHandler, type Response } from 'express';
import type { z } from 'zod';
import { mayDo, type Action, type ACTIONS_OF_A_BENCH, type ROLES_BY_ACTION } from '../shared/api/roles.js';
import { routes, type Route, type RouteName } from '../shared/api/routes.js';
import type { User } from '../shared/api/sessions.js';
import type { AppDependencies } from './app.js';
import { authorise } from './auth/authenticate.js';
import { recordAtBench, type BenchRef } from './auth/bench-store.js';
import { holdPerson } from './auth/people-store.js';
import type { Db } from './db.js';
import { InvalidError, MalformedError, NotSignedInError, RoleError, type Fault } from './errors.js';
import { idempotencyKeyOf, IDEMPOTENCY_HEADER, once, type StoredAnswer } from './idempotency.js';
import { OPENAPI_PATH } from './openapi.js';
import { faultsOf, textFaults } from './request-faults.js';

type Part<N extends RouteName, K extends string> =
  (typeof routes)[N] extends Record<K, infer S extends z.ZodType> ? z.output<S> : undefined;
type IsPublic<N extends RouteName> = 'public' extends (typeof ROLES_BY_ACTION)[(typeof routes)[N]['action']][number] ? true : false;
type IsForABenchAlone<N extends RouteName> = (typeof ROLES_BY_ACTION)[(typeof routes)[N]['action']] extends readonly [] ? true : false;
/** A shared bench reads by itself, with nobody signed on. */
type MayBeABenchAlone<N extends RouteName> = (typeof routes)[N]['action'] extends infer A extends keyof typeof ACTIONS_OF_A_BENCH
  ? (typeof ACTIONS_OF_A_BENCH)[A] extends 'alone'
    ? true
    : false
  : false;
type Asker<N extends RouteName> =
  IsPublic<N> extends true
    ? { person: undefined; bench: undefined }
    : IsForABenchAlone<N> extends true
      ? { person: User | undefined; bench: BenchRef }
      : MayBeABenchAlone<N> extends true
        ? { person: User | undefined; bench: BenchRef | undefined }
        : { person: User; bench: BenchRef | undefined };

/** Notes what is written down where the request is refused, in a transaction of its own: the request's own leaves nothing. */
export type IfRefused = (work: (trx: Db) => Promise<void>) => void;

/** What a handler gets: parsed parts, who asks (nobody on a public route), and the transaction that everything happens in. */
type RouteContext<N extends RouteName> = Asker<N> & {
  params: Part<N, 'params'>;
  query: Part<N, 'query'>;
  body: Part<N, 'body'>;
  trx: Db;
  now: Date;
  ifRefused: IfRefused;
  /** For cookies and addresses only. */
  http: { request: Request; response: Response };
};
/** A route with a media type of its own is answered piece by piece, after the transaction: a slow reader holds no connection. */
type Result<N extends RouteName> = (typeof routes)[N] extends { media: string }
  ? AsyncIterable<string | Buffer>
  : z.input<(typeof routes)[N]['response']>;
type Handler<N extends RouteName> = (context: RouteContext<N>) => Promise<Result<N>>;
interface RouteOptions {
  limits?: RequestHandler[];
  /** Before anything else in the transaction: a lock that must be taken first. */
  first?: (trx: Db) => Promise<void>;
}
export type RegisterRoute = <N extends RouteName>(name: N, handler: Handler<N>, options?: RouteOptions) => void;

interface StreamContext<N extends RouteName> {
  query: Part<N, 'query'>;
  http: { request: Request; response: Response };
  /** Asked again while the stream goes on: whoever was signed out meanwhile hears nothing more. */
  stillAllowed: () => Promise<boolean>;
}
export type RegisterStream = <N extends RouteName>(name: N, handler: (context: StreamContext<N>) => Promise<void>) => void;

/** A capture of an hour, or a bench log with several in it. Everything else is small. */
const LARGE_BODY_BYTES = 40_000_000;
const USUAL_BODY_BYTES = 2_000_000;
const LARGE_BODIES: readonly RouteName[] = ['recordCapture', 'recordRun'];

/** Registers handlers by the shared table: who may, what fits, once, in one transaction, and an answer that keeps its word. */
export function routesOn(app: Express, deps: AppDependencies): RegisterRoute {
  const authoriseFor = authorise(deps);
  return (name, handler, { limits = [], first } = {}) => {
    const spec: Route = routes[name];
    const method = spec.method.toLowerCase() as 'get' | 'post' | 'delete';
    app[method](spec.path, authoriseFor(spec.action), ...(spec.body ? bodyReader(name) : []), ...limits, async (request, response) => {
      await answer(spec, { handler: handler as unknown as AnyHandler, first }, deps, request, response);
    });
  };
}

/** Registers an answer without end by the shared table: who may and what fits, as for every route; no transaction, which would never end. */
export function streamsOn(app: Express, deps: AppDependencies): RegisterStream {
  const authoriseFor = authorise(deps);
  return (name, handler) => {
    const spec: Route = routes[name];
    const mayHear = authoriseFor(spec.action);
    app.get(spec.path, mayHear, async (request, response) => {
      const { query } = parseRequest(spec, request) as { query: Part<typeof name, 'query'> };
      // The stream has long begun: what a refusal would set goes to nobody.
      const nobody = new ServerResponse(request) as Response;
      const stillAllowed = (): Promise<boolean> =>
        new Promise((resolve, reject) => {
          const answer = (error?: unknown): void => {
            if (error === undefined) resolve(true);
            else if (error instanceof NotSignedInError || error instanceof RoleError) resolve(false);
            else reject(new Error('Who asks could not be looked up.', { cause: error }));
          };
          try {
            // A refusal comes either way: thrown, or handed on.
            void mayHear(request, nobody, answer);
          } catch (error) {
            answer(error);
          }
        });
      await handler({ query, http: { request, response }, stillAllowed });
    });
  };
}

function bodyReader(name: RouteName): RequestHandler[] {
  const limit = LARGE_BODIES.includes(name) ? LARGE_BODY_BYTES : USUAL_BODY_BYTES;
  return [
    (request, _response, next) => {
      const hasBody = request.headers['transfer-encoding'] !== undefined || Number(request.headers['content-length'] ?? 0) > 0;
      if (hasBody && request.is('application/json') === false)
        throw new MalformedError(415, 'Send JSON: the media type is application/json.');
      next();
    },
    express.json({ limit, strict: false }),
  ];
}

type AnyHandler = (context: RouteContext<RouteName>) => Promise<unknown>;

async function answer(
  spec: Route,
  { handler, first }: { handler: AnyHandler; first: RouteOptions['first'] },
  deps: AppDependencies,
  request: Request,
  response: Response,
): Promise<void> {
  const parts = parseRequest(spec, request);
  const key = spec.idempotent ? idempotencyKeyOf(request.get(IDEMPOTENCY_HEADER)) : undefined;
  const now = deps.clock();
  const person = request.user;
  const refusals: ((trx: Db) => Promise<void>)[] = [];
  const ifRefused: IfRefused = (refusal) => void refusals.push(refusal);
  let pieces: AsyncIterable<string | Buffer> | undefined;
  const run = async (trx: Db): Promise<StoredAnswer & { again: boolean }> => {
    await first?.(trx);
    if (person && spec.method !== 'GET') await refuseWhoMayNoLonger(trx, person, spec.action);
    if (request.bench && spec.method !== 'GET') await recordAtBench(trx, request.bench);
    const work = async (): Promise<StoredAnswer> => {
      const asks = { person, bench: request.bench, http: { request, response } };
      const result = await handler({ ...parts, ...asks, trx, now, ifRefused } as unknown as RouteContext<RouteName>);
      if (spec.media === undefined) return { status: spec.status, text: serialise(spec, result) };
      pieces = result as AsyncIterable<string | Buffer>;
      return { status: spec.status, text: '' };
    };
    if (key === undefined || person === undefined) return { ...(await work()), again: false };
    return once(trx, { personId: person.id, key, method: spec.method, path: request.path, body: parts.body, now }, work);
  };
  // A page of several queries shows one moment; a write sees what others have committed while it waited for its lock.
  const isolation = spec.method === 'GET' ? ({ isolationLevel: 'repeatable read', readOnly: true } as const) : {};
  const { status, text, again } = await deps.db.transaction(run, isolation).catch(async (error: unknown) => {
    for (const refusal of refusals) await deps.db.transaction(refusal);
    throw error;
  });
  if (again) response.set('Idempotency-Replayed', 'true');
  response.status(status);
  if (spec.media !== undefined && pieces) await pipeline(Readable.from(pieces), response.type(spec.media));
  else if (status === 204) response.end();
  else response.type('application/json').send(text);
}

/** Between the look at the token and the transaction somebody may have been deactivated; from here on nobody can be until it ends. */
async function refuseWhoMayNoLonger(trx: Db, person: User, action: Action): Promise<void> {
  const held = await holdPerson(trx, person.id, 'to act');
  if (!held?.active) throw new NotSignedInError('The sign-in is no longer good.');
  const { role } = held.user;
  if (role !== person.role && !mayDo(role, action)) throw new RoleError(`Your role was changed to ${role} a moment ago.`);
}

/** The answer must be what the table promises: anything else is a fault of ours, not the caller's. */
function serialise(spec: Route, result: unknown): string {
  const parsed = spec.response.safeParse(result);
  if (!parsed.success) throw new Error(`The answer of ${spec.method} ${spec.path} does not fit its schema: ${parsed.error.message}`);
  return JSON.stringify(parsed.data);
}

function parseRequest(spec: Route, request: Request): { params: unknown; query: unknown; body: unknown } {
  const faults: Fault[] = [];
  const parse = (schema: z.ZodType | undefined, value: unknown, at: string): unknown => {
    if (!schema) return undefined;
    const inText = textFaults(value, at);
    if (inText.length > 0) {
      faults.push(...inText);
      return undefined;
    }
    const parsed = schema.safeParse(value);
    if (parsed.success) return parsed.data;
    faults.push(...faultsOf(parsed.error, at));
    return undefined;
  };
  const parts = {
    params: parse(spec.params, request.params, '/params'),
    query: parse(spec.query, request.query, '/query'),
    body: parse(spec.body, request.body as unknown, ''),
  };
  if (faults.length > 0) throw new InvalidError(faults);
  return parts;
}

/** After the last route: a path of the table with another method, and paths that are not in it. */
export function refuseOtherMethods(app: Express): void {
  const methodsByPath = new Map<string, string[]>([[OPENAPI_PATH, ['GET']]]);
  for (const { path, method } of Object.values(routes)) methodsByPath.set(path, [...(methodsByPath.get(path) ?? []), method]);
  for (const [path, methods] of methodsByPath) {
    app.all(path, (_request, response) => {
      response.set('Allow', methods.join(', '));
      throw new MalformedError(405, `This address takes ${methods.join(', ')}.`);
    });
  }
}
