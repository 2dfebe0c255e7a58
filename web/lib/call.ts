import { problemSchema } from '../../shared/api/problem.js';
import {
  routes,
  routeUrl,
  type Answer,
  type RequestBody,
  type RequestParams,
  type RequestQuery,
  type Route,
  type RouteName,
} from '../../shared/api/routes.js';
import { ApiProblem, UnreachableError } from './api-problem.js';

type Named<K extends string, T> = T extends undefined ? unknown : Record<K, T>;
export type CallRequest<N extends RouteName> = Named<'params', RequestParams<N>> &
  (RequestQuery<N> extends undefined ? unknown : { query?: RequestQuery<N> }) &
  Named<'body', RequestBody<N>> & { idempotencyKey?: string; signal?: AbortSignal };

type Texts = Record<string, string | number | boolean | undefined>;

interface LooseRequest {
  params?: Texts;
  query?: Texts;
  body?: unknown;
  idempotencyKey?: string;
  signal?: AbortSignal;
}

/**
 * Calls a route of the API and parses its answer by the route's own schema. Throws ApiProblem for a refusal, UnreachableError where nothing
 * sensible answered.
 */
export async function call<N extends RouteName>(name: N, request: CallRequest<N>): Promise<Answer<N>> {
  const { params, query, body, idempotencyKey, signal } = request as LooseRequest;
  const route: Route = routes[name];
  let response: Response;
  try {
    response = await fetch(routeUrl(name, { ...(params === undefined ? {} : { params }), ...(query === undefined ? {} : { query }) }), {
      method: route.method,
      credentials: 'same-origin',
      headers: {
        Accept: 'application/json, application/problem+json',
        ...(body === undefined ? {} : { 'Content-Type': 'application/json' }),
        ...(idempotencyKey === undefined ? {} : { 'Idempotency-Key': idempotencyKey }),
      },
      ...(body === undefined ? {} : { body: JSON.stringify(body) }),
      ...(signal === undefined ? {} : { signal }),
    });
  } catch (error) {
    if (error instanceof DOMException && error.name === 'AbortError') throw error;
    throw new UnreachableError('The server does not answer.');
  }
  if (response.status === 204) return route.response.parse({}) as Answer<N>;
  const answer: unknown = await response.json().catch(() => undefined);
  if (!response.ok) {
    const problem = problemSchema.safeParse(answer);
    if (problem.success) throw new ApiProblem(problem.data);
    throw new UnreachableError(`The server answered ${response.status} without a reason.`);
  }
  const parsed = route.response.safeParse(answer);
  if (!parsed.success) throw new UnreachableError('The server’s answer is of another version than this page: load the page again.');
  return parsed.data as Answer<N>;
}
