import { z } from 'zod';
import { problemSchema } from '../shared/api/problem.js';
import { PERSON_HEADER } from '../shared/api/benches.js';
import { benchMay, ROLES_BY_ACTION } from '../shared/api/roles.js';
import { routes, type Route } from '../shared/api/routes.js';
import { SESSION_COOKIES } from './auth/session-cookie.js';
import { IDEMPOTENCY_HEADER } from './idempotency.js';
import { PROBLEM_MEDIA_TYPE } from './problem.js';

type Json = Record<string, unknown>;

export const OPENAPI_PATH = '/api/openapi.json';

function jsonSchema(schema: z.ZodType, io: 'input' | 'output'): Json {
  const { $schema: _dialect, ...rest } = z.toJSONSchema(schema, { io, reused: 'inline' }) as Json;
  return rest;
}

const parameters = (schema: z.ZodObject | undefined, place: 'path' | 'query'): Json[] =>
  Object.entries(schema?.shape ?? {}).map(([name, field]) => ({
    name,
    in: place,
    required: place === 'path' || !(field as z.ZodType).safeParse(undefined).success,
    schema: jsonSchema(field as z.ZodType, 'input'),
  }));

const idempotencyHeader: Json = {
  name: IDEMPOTENCY_HEADER,
  in: 'header',
  required: true,
  description: 'Sent twice, it is stored once and answered alike; with another body, 409. Kept 90 days.',
  schema: { type: 'string', minLength: 1, maxLength: 200 },
};

const lastEventIdHeader: Json = {
  name: 'Last-Event-ID',
  in: 'header',
  required: false,
  description: 'Go on after this event, without a gap or a repeat; where it is too long ago, the stream starts anew and says so.',
  schema: { type: 'string', maxLength: 40 },
};

const personHeader: Json = {
  name: PERSON_HEADER,
  in: 'header',
  required: false,
  description: 'By a shared bench’s token only, and then needed: the id of who does it, somebody who has signed on at that bench.',
  schema: { type: 'string', format: 'uuid' },
};

const headers = (route: Route): Json[] => [
  ...(route.idempotent ? [idempotencyHeader] : []),
  ...(route.stream ? [lastEventIdHeader] : []),
  ...(benchMay(route.action) === 'person' ? [personHeader] : []),
];

const problemResponse = (description: string): Json => ({
  description,
  content: { [PROBLEM_MEDIA_TYPE]: { schema: { $ref: '#/components/schemas/Problem' } } },
});

function problemResponses(route: Route, isPublic: boolean): Json {
  return {
    ...(isPublic ? {} : { 401: problemResponse('Nobody is signed in'), 403: problemResponse('Another role’s to do, or a gate is shut') }),
    ...(route.path.includes(':') ? { 404: problemResponse('Not there') } : {}),
    ...(route.method === 'POST' ? { 409: problemResponse('It contradicts what is stored') } : {}),
    ...(route.body || route.query || route.params
      ? { 422: problemResponse('Fields that can’t be used, each with a JSON pointer and a reason') }
      : {}),
    default: problemResponse('Any other problem'),
  };
}

function operation(name: string, route: Route): Json {
  const roles: readonly string[] = ROLES_BY_ACTION[route.action];
  const isPublic = roles.includes('public');
  const bench = benchMay(route.action);
  const all = [...parameters(route.params, 'path'), ...parameters(route.query, 'query'), ...headers(route)];
  return {
    operationId: name,
    summary: route.summary,
    'x-roles': roles,
    ...(bench === undefined ? {} : { 'x-bench': bench }),
    // Either of them; a bench has no cookie.
    security: isPublic ? [] : roles.length === 0 ? [{ bearer: [] }] : [{ bearer: [] }, { cookie: [] }],
    ...(all.length > 0 ? { parameters: all } : {}),
    ...(route.body
      ? { requestBody: { required: true, content: { 'application/json': { schema: jsonSchema(route.body, 'input') } } } }
      : {}),
    responses: {
      [String(route.status)]:
        route.status === 204
          ? { description: 'Done' }
          : route.stream
            ? {
                description: 'Server-sent events (WHATWG HTML, section 9.2) without end; the schema is that of the data of each event',
                content: { 'text/event-stream': { schema: { type: 'string' }, 'x-event-schema': jsonSchema(route.response, 'output') } },
              }
            : { description: 'Done', content: { [route.media ?? 'application/json']: { schema: jsonSchema(route.response, 'output') } } },
      ...problemResponses(route, isPublic),
    },
  };
}

/** OpenAPI 3.1, made from the table that checks the requests. */
export function openApiDocument(): Json {
  const paths: Record<string, Json> = {};
  for (const [name, route] of Object.entries(routes) as [string, Route][]) {
    const path = route.path.replace(/:(\w+)/g, '{$1}');
    paths[path] = { ...paths[path], [route.method.toLowerCase()]: operation(name, route) };
  }
  paths[OPENAPI_PATH] = {
    get: {
      operationId: 'openApi',
      summary: 'This document',
      'x-roles': ['public'],
      security: [],
      responses: {
        200: { description: 'Done', content: { 'application/json': { schema: { type: 'object' } } } },
        default: problemResponse('Any problem'),
      },
    },
  };
  return {
    openapi: '3.1.0',
    info: {
      title: 'Refettle',
      version: '1',
      description: 'From the gate to the buyer: units, captures, readings, bench runs, sign-off, readiness tags.',
    },
    paths,
    components: {
      securitySchemes: {
        bearer: {
          type: 'http',
          scheme: 'bearer',
          description:
            'RFC 6750, in the Authorization header only: a person’s, or a shared bench’s, which does what x-bench says: alone by itself, person for who signed on.',
        },
        cookie: {
          type: 'apiKey',
          in: 'cookie',
          name: SESSION_COOKIES.http,
          description: `Set by POST /api/sessions with keep: "cookie"; over https it is called ${SESSION_COOKIES.https}. A write by it must come from the server’s own pages.`,
        },
      },
      schemas: { Problem: jsonSchema(problemSchema, 'output') },
    },
  };
}
