import { hostname } from 'node:os';
import { PERSON_HEADER } from '../../shared/api/benches.js';
import { problemSchema, PROBLEM_TYPE_PREFIX } from '../../shared/api/problem.js';
import { benchMay } from '../../shared/api/roles.js';
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
import { ApiProblemError, NotSignedInError, ServerError, ServerUnreachableError, StoppedError, UsageError } from '../errors.js';

/** How long the server may take: to answer a question, and to store a bench log with its captures. */
const QUESTION_TIMEOUT_MS = 15_000;
const WRITE_TIMEOUT_MS = 120_000;

/** By which the server's list of sessions says where this one is (server/auth/used-from.ts). */
const AGENT = `refettle-terminal (${
  hostname()
    .replace(/[^\w.-]/g, '-')
    .slice(0, 63) || 'unnamed'
})`;

export interface ApiRequest<N extends RouteName> {
  params?: RequestParams<N>;
  query?: RequestQuery<N>;
  body?: RequestBody<N>;
  /** Sent twice with the same key, it is stored once. */
  idempotencyKey?: string;
  /** How long this call may take, where it is less than usual. */
  timeoutMs?: number;
}

export interface Api {
  readonly server: string;
  call<N extends RouteName>(name: N, request?: ApiRequest<N>): Promise<Answer<N>>;
  /** The answer of a route that has a media type of its own, piece by piece: it may be long. */
  pieces<N extends RouteName>(name: N, request?: ApiRequest<N>): AsyncIterable<Uint8Array>;
}

export interface ApiParts {
  server: string;
  token: () => string | undefined;
  /** On a shared bench: for whom it writes, and what to do where the server no longer knows the bench. */
  bench?: { person: () => string | undefined; remedy: string } | undefined;
  /** Ends a call that is under way. */
  signal: AbortSignal | undefined;
  fetch?: typeof fetch;
}

/** Calls the server by the table of routes; what it answers is checked by the same table. */
export function createApi({ server, token, bench, signal, fetch: send = fetch }: ApiParts): Api {
  if (!/^https?:\/\/[^/]+/.test(server))
    throw new UsageError(`REFETTLE_SERVER is no address: '${server}'. Write it like http://127.0.0.1:4780`);
  const asked = <N extends RouteName>(name: N, request: ApiRequest<N>) => {
    const route: Route = routes[name];
    const bearer = token();
    const person = benchMay(route.action) === 'person' ? bench?.person() : undefined;
    const quick = route.method === 'GET' && route.media === undefined;
    const init = {
      method: route.method,
      headers: {
        accept: route.media ?? 'application/json',
        // The sessions of a person are told apart by it.
        'user-agent': AGENT,
        ...(request.body === undefined ? {} : { 'content-type': 'application/json' }),
        ...(bearer === undefined ? {} : { authorization: `Bearer ${bearer}` }),
        ...(person === undefined ? {} : { [PERSON_HEADER]: person }),
        ...(request.idempotencyKey === undefined ? {} : { 'idempotency-key': request.idempotencyKey }),
      },
      ...(request.body === undefined ? {} : { body: JSON.stringify(request.body) }),
      signal: AbortSignal.any([
        ...(signal ? [signal] : []),
        AbortSignal.timeout(request.timeoutMs ?? (quick ? QUESTION_TIMEOUT_MS : WRITE_TIMEOUT_MS)),
      ]),
    };
    return { route, url: `${server}${routeUrl(name, request as Parameters<typeof routeUrl>[1])}`, init };
  };
  return {
    server,
    async *pieces(name, request = {}) {
      const { url, init } = asked(name, request);
      try {
        const response = await send(url, init);
        if (response.status >= 400) throw problemOf(await readWhole(response, server), server, bench?.remedy);
        yield* response.body as unknown as AsyncIterable<Uint8Array>;
      } catch (error) {
        throw notAnswered(error, server, init.signal);
      }
    },
    async call(name, request = {}) {
      const { route, url, init } = asked(name, request);
      const response = await ask(send, server, url, init);
      if (response.status >= 400) throw problemOf(response, server, bench?.remedy);
      const parsed = route.response.safeParse(response.status === 204 ? {} : response.json());
      if (!parsed.success) throw notOurs(server);
      return parsed.data as Answer<typeof name>;
    },
  };
}

interface Response {
  status: number;
  retryAfterSeconds: number | undefined;
  serverTime: Date | undefined;
  /** Throws a ServerError where the text is no JSON. */
  json(): unknown;
}

async function ask(send: typeof fetch, server: string, url: string, init: RequestInit & { signal: AbortSignal }): Promise<Response> {
  try {
    return await readWhole(await send(url, init), server);
  } catch (error) {
    throw notAnswered(error, server, init.signal);
  }
}

async function readWhole(response: globalThis.Response, server: string): Promise<Response> {
  const text = await response.text();
  return {
    status: response.status,
    ...timesOf(response.headers),
    json: () => {
      try {
        return JSON.parse(text) as unknown;
      } catch {
        throw notOurs(server);
      }
    },
  };
}

function notAnswered(error: unknown, server: string, signal: AbortSignal): Error {
  if (error instanceof ServerError) return error;
  if (signal.aborted && !isTimeout(signal.reason)) return new StoppedError();
  return new ServerUnreachableError(server, whyUnreachable(error), { cause: error, timedOut: isTimeout(error) });
}

/** What the server says about time: when to come again (RFC 9110, section 10.2.3: seconds or a date), and what it is by its own clock. */
function timesOf(headers: Headers): { retryAfterSeconds: number | undefined; serverTime: Date | undefined } {
  const date = Date.parse(headers.get('date') ?? '');
  const serverTime = Number.isNaN(date) ? undefined : new Date(date);
  const after = headers.get('retry-after') ?? '';
  const until = Date.parse(after);
  const seconds = /^\d+$/.test(after)
    ? Number(after)
    : Number.isNaN(until)
      ? undefined
      : Math.max(0, (until - (serverTime ?? new Date()).getTime()) / 1000);
  return { retryAfterSeconds: seconds, serverTime };
}

const isTimeout = (reason: unknown): boolean => reason instanceof Error && reason.name === 'TimeoutError';

function whyUnreachable(error: unknown): string {
  if (isTimeout(error)) return 'it does not answer in time';
  const cause = error instanceof Error ? (error.cause as NodeJS.ErrnoException | undefined) : undefined;
  switch (cause?.code) {
    case 'ECONNREFUSED':
      return 'nothing listens there';
    case 'ENOTFOUND':
    case 'EAI_AGAIN':
      return 'its name is not known to the network';
    // Node's words for a certificate that the shop made itself, or one made for another name.
    case 'DEPTH_ZERO_SELF_SIGNED_CERT':
    case 'SELF_SIGNED_CERT_IN_CHAIN':
    case 'UNABLE_TO_VERIFY_LEAF_SIGNATURE':
    case 'UNABLE_TO_GET_ISSUER_CERT_LOCALLY':
      return 'this bench does not trust its certificate (NODE_EXTRA_CA_CERTS=/path/to/ca.pem names one to trust)';
    case 'ERR_TLS_CERT_ALTNAME_INVALID':
      return 'its certificate is for another name';
    case 'CERT_HAS_EXPIRED':
      return 'its certificate has ended';
    case 'ECONNRESET':
    case 'UND_ERR_SOCKET':
      return 'the connection broke off';
    default:
      return cause?.code ?? (error instanceof Error ? error.message : String(error));
  }
}

function notOurs(server: string): ServerError {
  return new ServerError(
    `What answers at ${server} is not this version of Refettle.`,
    'Check REFETTLE_SERVER; an admin brings bench and server to the same version.',
  );
}

/** Who can do something about a refusal where the server does not say. */
function usualRemedy(status: number): string {
  if (status === 403) return 'Somebody with the right role does it.';
  if (status === 404) return 'Check the number or the name.';
  if (status === 409) return 'Somebody else was quicker, or it is there already: look at it and decide.';
  if (status === 429) return 'Wait a minute, then try again.';
  if (status >= 500) return 'Try again; if it stays, an admin looks at the server.';
  return 'Correct what it names.';
}

function problemOf(response: Response, server: string, signInRemedy: string | undefined): ServerError {
  if (response.status === 401) {
    const detail = problemSchema.safeParse(response.json()).data;
    // A refused sign-in is a 401 too, and says so in its own words.
    return new NotSignedInError(server, detail?.detail, signInRemedy);
  }
  const parsed = problemSchema.safeParse(response.json());
  if (!parsed.success) return notOurs(server);
  const { type, title, detail, errors, remedy } = parsed.data;
  return new ApiProblemError({
    status: response.status,
    kind: type.startsWith(PROBLEM_TYPE_PREFIX) ? type.slice(PROBLEM_TYPE_PREFIX.length) : '',
    title,
    detail,
    errors,
    retryAfterSeconds: response.retryAfterSeconds,
    serverTime: response.serverTime,
    remedy: remedy ?? usualRemedy(response.status),
  });
}
