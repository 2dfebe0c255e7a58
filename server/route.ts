import express, { type Express, type Request, type RequestHandler, type Response } from 'express';
import type { z } from 'zod';
import type { ROLES_BY_ACTION } from '../shared/api/roles.js';
import { routes, type Route, type RouteName } from '../shared/api/routes.js';
import type { User } from '../shared/api/sessions.js';
import type { AppDependencies } from './app.js';
import { authorise } from './auth/authenticate.js';
import type { Db } from './db.js';
import { InvalidError, MalformedError, type Fault } from './errors.js';
import { idempotencyKeyOf, IDEMPOTENCY_HEADER, once, type StoredAnswer } from './idempotency.js';
import { OPENAPI_PATH } from './openapi.js';
import { faultsOf, textFaults } from './request-faults.js';

type Part<N extends RouteName, K extends string> =
  (typeof routes)[N] extends Record<K, infer S extends z.ZodType> ? z.output<S> : undefined;
type IsPublic<N extends RouteName> = 'public' extends (typeof ROLES_BY_ACTION)[(typeof routes)[N]['action']][number] ? true : false;

/** What a handler gets: parsed parts, who asks (nobody on a public route), and the transaction that everything happens in. */
interface RouteContext<N extends RouteName> {
  params: Part<N, 'params'>;
  query: Part<N, 'query'>;
  body: Part<N, 'body'>;
  person: IsPublic<N> extends true ? undefined : User;
  trx: Db;
  now: Date;
  /** For cookies and addresses only. */
  http: { request: Request; response: Response };
}
type Handler<N extends RouteName> = (context: RouteContext<N>) => Promise<z.input<(typeof routes)[N]['response']>>;
export type RegisterRoute = <N extends RouteName>(name: N, handler: Handler<N>, options?: { limits?: RequestHandler[] }) => void;

/** A capture of an hour, or a bench log with several in it. Everything else is small. */
const LARGE_BODY_BYTES = 40_000_000;
const USUAL_BODY_BYTES = 2_000_000;
const LARGE_BODIES: readonly RouteName[] = ['recordCapture', 'recordRun'];

/** Registers handlers by the shared table: who may, what fits, once, in one transaction, and an answer that keeps its word. */
export function routesOn(app: Express, deps: AppDependencies): RegisterRoute {
  const authoriseFor = authorise(deps);
  return (name, handler, { limits = [] } = {}) => {
    const spec: Route = routes[name];
    const method = spec.method.toLowerCase() as 'get' | 'post' | 'delete';
    app[method](spec.path, authoriseFor(spec.action), ...(spec.body ? bodyReader(name) : []), ...limits, async (request, response) => {
      await answer(spec, handler as unknown as Handler<RouteName>, deps, request, response);
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

async function answer(
  spec: Route,
  handler: Handler<RouteName>,
  deps: AppDependencies,
  request: Request,
  response: Response,
): Promise<void> {
  const parts = parseRequest(spec, request);
  const key = spec.idempotent ? idempotencyKeyOf(request.get(IDEMPOTENCY_HEADER)) : undefined;
  const now = deps.clock();
  const person = request.user;
  const run = async (trx: Db): Promise<StoredAnswer & { again: boolean }> => {
    const work = async (): Promise<StoredAnswer> => {
      const context = { ...parts, person, trx, now, http: { request, response } } as unknown as RouteContext<RouteName>;
      return { status: spec.status, text: serialise(spec, await handler(context)) };
    };
    if (key === undefined || person === undefined) return { ...(await work()), again: false };
    return once(trx, { personId: person.id, key, method: spec.method, path: request.path, body: parts.body, now }, work);
  };
  // A page of several queries shows one moment; a write sees what others have committed while it waited for its lock.
  const isolation = spec.method === 'GET' ? ({ isolationLevel: 'repeatable read', readOnly: true } as const) : {};
  const { status, text, again } = await deps.db.transaction(run, isolation);
  if (again) response.set('Idempotency-Replayed', 'true');
  response.status(status);
  if (status === 204) response.end();
  else response.type('application/json').send(text);
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
