import request from 'supertest';
import { afterAll, beforeAll, expect, test } from 'vitest';
import { benchMay, ROLES_BY_ACTION } from '../../shared/api/roles.js';
import { routes, type Route } from '../../shared/api/routes.js';
import { startTestServer, type TestServer } from '../helpers/test-server.js';

interface Operation {
  operationId: string;
  'x-roles': string[];
  'x-bench'?: string;
  security: unknown[];
  parameters?: { name: string; in: string; required: boolean; schema: { type?: string; maximum?: number } }[];
  requestBody?: { content: Record<string, { schema: Record<string, unknown> }> };
  responses: Record<string, { content?: Record<string, { schema: Record<string, unknown> }> }>;
}
interface Document {
  openapi: string;
  paths: Record<string, Record<string, Operation>>;
  components: { securitySchemes: Record<string, unknown>; schemas: Record<string, unknown> };
}

let server: TestServer;
let document: Document;
beforeAll(async () => {
  server = await startTestServer();
  document = (await request(server.app).get('/api/openapi.json').expect(200)).body as Document;
});
afterAll(() => server.close());

const table = Object.entries(routes) as [string, Route][];
const operationOf = (route: Route): Operation | undefined =>
  document.paths[route.path.replace(/:(\w+)/g, '{$1}')]?.[route.method.toLowerCase()];

test('When the document is read, then it is OpenAPI 3.1 and describes every route of the table, itself, and nothing else', () => {
  expect(document.openapi).toBe('3.1.0');
  const described = Object.entries(document.paths).flatMap(([path, operations]) =>
    Object.keys(operations).map((method) => `${method.toUpperCase()} ${path}`),
  );
  const wanted = table.map(([, { method, path }]) => `${method} ${path.replace(/:(\w+)/g, '{$1}')}`);
  expect(described.sort()).toEqual([...wanted, 'GET /api/openapi.json'].sort());
});

test.each(table)('When %s is described, then its roles are those that the server asks', (_name, route) => {
  const operation = operationOf(route);
  expect(operation?.['x-roles']).toEqual(ROLES_BY_ACTION[route.action]);
  const byOneself = [{ bearer: [] }, { cookie: [] }];
  const forABench = [{ bearer: [] }];
  const roles = operation?.['x-roles'] ?? [];
  expect(operation?.security).toEqual(roles.includes('public') ? [] : roles.length === 0 ? forABench : byOneself);
  expect(operation?.['x-bench']).toBe(benchMay(route.action));
  expect(operation?.parameters?.some(({ name }) => name === 'Refettle-Person') ?? false).toBe(benchMay(route.action) === 'person');
});

test.each(table)('When %s is described, then its parts are the ones that it checks', (_name, route) => {
  const operation = operationOf(route);
  const parameters = operation?.parameters ?? [];
  expect(parameters.filter((one) => one.in === 'path').map((one) => one.name)).toEqual(
    [...route.path.matchAll(/:(\w+)/g)].map(([, name]) => name),
  );
  expect(parameters.filter((one) => one.in === 'query').map((one) => one.name)).toEqual(Object.keys(route.query?.shape ?? {}));
  expect(parameters.some((one) => one.name === 'Idempotency-Key' && one.required)).toBe(route.idempotent === true);
  expect(operation?.requestBody !== undefined).toBe(route.body !== undefined);
  expect(operation?.responses[String(route.status)]).toBeDefined();
  expect(operation?.responses['default']?.content?.['application/problem+json']?.schema).toEqual({ $ref: '#/components/schemas/Problem' });
});

test('When a schema is printed, then it says what the server asks for and no more', () => {
  const unit = document.paths['/api/units']?.['post']?.requestBody?.content['application/json']?.schema as {
    required: string[];
    additionalProperties: boolean;
  };
  expect(unit.required.sort()).toEqual(['appliance', 'complaint', 'plate']); // costMinor has a default
  expect(unit.additionalProperties).toBe(false);
  expect(document.paths['/api/units/{number}']?.['get']?.parameters?.[0]).toMatchObject({
    name: 'number',
    in: 'path',
    required: true,
    schema: { type: 'integer' },
  });
  expect(document.components.securitySchemes).toMatchObject({
    bearer: { type: 'http', scheme: 'bearer' },
    cookie: { type: 'apiKey', in: 'cookie', name: 'refettle_session' },
  });
});
