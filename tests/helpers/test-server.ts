// A whole server inside the test's own process: its own database, its own clock, nothing mocked.
import { generateKeyPairSync } from 'node:crypto';
import { mkdtempSync, rmSync } from 'node:fs';
import { Agent, createServer } from 'node:http';
import type { Express } from 'express';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { pino } from 'pino';
import request, { type Test } from 'supertest';
import { expect } from 'vitest';
import { v7 as newId } from 'uuid';
import { PERSON_HEADER } from '../../shared/api/benches.js';
import { problemSchema, type Problem } from '../../shared/api/problem.js';
import { ROLES, type Role } from '../../shared/api/roles.js';
import { routes, routeUrl, type Answer, type RouteName } from '../../shared/api/routes.js';
import type { Shop, User } from '../../shared/api/sessions.js';
import { createApp, type AppDependencies } from '../../server/app.js';
import { insertPerson } from '../../server/auth/people-store.js';
import { insertSession } from '../../server/auth/session-store.js';
import { newToken } from '../../server/auth/token.js';
import type { Config } from '../../server/config.js';
import { LiveHub } from '../../server/features/live/live-hub.js';
import { signingKeyOf } from '../../server/features/tags/signing-key.js';
import { EMPTY_SHOP, insertShop } from '../../server/history/shop-store.js';
import { firstEvent } from './first-event.js';
import { freshDatabase, type FreshDatabase } from './fresh-database.js';

export interface SignedInPerson extends User {
  token: string;
}

/** The token of a shared bench, and who stands there. */
export interface AtBench {
  token: string;
  person: string | undefined;
}

type Texts = Record<string, string | number | boolean | undefined>;

export interface Call {
  params?: Texts;
  query?: Texts;
  body?: unknown;
  /** Undefined: nobody. */
  as?: SignedInPerson | AtBench | undefined;
  /** Undefined: a new one where the route needs one. */
  key?: string;
}

export interface TestServer {
  app: Express;
  deps: AppDependencies;
  people: Record<Role, SignedInPerson>;
  /** A second lead, for four eyes. */
  otherLead: SignedInPerson;
  /** What the server takes for now; tests set it. */
  time: { now: Date };
  /** Lines that the server logged, whole. */
  logged: string[];
  /** The raw answer to a route of the table. */
  send(name: RouteName, call?: Call): Test;
  /** The parsed answer; anything but the route's own status fails the test with the problem's words. */
  ok<N extends RouteName>(name: N, call?: Call): Promise<Answer<N>>;
  addPerson(role: Role, name: string): Promise<SignedInPerson>;
  close(): Promise<void>;
}

export interface TestServerOptions {
  shop?: Partial<Shop>;
  config?: Partial<Config>;
  webDir?: string;
  signingKey?: AppDependencies['signingKey'];
  /** A database that is there already, with its shop and its people; the caller drops it. */
  existing?: { database: FreshDatabase; people: Record<Role, SignedInPerson> };
}

const PUBLIC_URL = 'https://tags.millrace.example';
/** A hash that no password fits and that costs nothing to make: these people sign in by token. */
const NO_PASSWORD = '$argon2id$v=19$m=19456,t=2,p=1$AAAAAAAAAAAAAAAAAAAAAA$AAAAAAAAAAAAAAAAAAAAAAAAAAAAAAAAAAAAAAAAAAA';

export async function startTestServer({
  shop = {},
  config = {},
  webDir,
  signingKey: ownKey,
  existing,
}: TestServerOptions = {}): Promise<TestServer> {
  const fresh = existing?.database ?? (await freshDatabase());
  const dataDir = mkdtempSync(join(tmpdir(), 'refettle-test-data-'));
  const time = { now: new Date('2026-03-05T09:00:00Z') };
  const logged: string[] = [];
  const log = pino({ level: 'info' }, { write: (line: string) => void logged.push(line) });
  const signingKey = await signingKeyOf(generateKeyPairSync('ed25519').privateKey);
  const deps: AppDependencies = {
    db: fresh.db,
    config: {
      host: '127.0.0.1',
      port: 4780,
      dataDir,
      databaseUrl: fresh.url,
      demo: false,
      publicUrl: PUBLIC_URL,
      tls: undefined,
      trustedProxies: ['loopback'],
      publicListener: undefined,
      ...config,
    },
    signingKey: ownKey ?? (() => Promise.resolve(signingKey)),
    clock: () => time.now,
    live: new LiveHub({ db: fresh.db, databaseUrl: fresh.url, log }),
    webDir,
    log,
  };
  await insertShop(deps.db, { ...EMPTY_SHOP, name: 'Millrace Mend', address: '12 Dyehouse Yard', phone: '01632 960412', ...shop });
  const app = createApp(deps);
  // One port and few connections for all that is sent, none of which it closes: a server of its own for each request cost more than that.
  const http = createServer({ keepAliveTimeout: 0 }, app).listen(0);
  const connections = new Agent({ keepAlive: true });

  const addPerson = async (role: Role, name: string): Promise<SignedInPerson> => {
    const person = { id: newId(), name, email: `${name.toLowerCase().replaceAll(' ', '.')}@millrace.example`, role };
    const token = newToken();
    await insertPerson(deps.db, { ...person, passwordHash: NO_PASSWORD, createdAt: time.now });
    await insertSession(deps.db, { token, personId: person.id, createdAt: time.now, expiresAt: new Date('2100-01-01T00:00:00Z') });
    return { ...person, token };
  };
  const names: Record<Role, string> = { technician: 'Wil Tarrow', lead: 'Maren Holt', sales: 'Odile Finch', admin: 'Joss Penn' };
  const people = {} as Record<Role, SignedInPerson>;
  for (const role of ROLES) people[role] = existing?.people[role] ?? (await addPerson(role, names[role]));

  const send = (name: RouteName, { params, query, body, as, key }: Call = {}): Test => {
    const route = routes[name];
    const method = route.method.toLowerCase() as 'get' | 'post' | 'delete';
    const url = routeUrl(name, { ...(params ? { params } : {}), ...(query ? { query } : {}) });
    let sent = request(http)[method](url).agent(connections);
    if (as) sent = sent.set('Authorization', `Bearer ${as.token}`);
    if (as && 'person' in as && as.person !== undefined) sent = sent.set(PERSON_HEADER, as.person);
    if ('idempotent' in route) sent = sent.set('Idempotency-Key', key ?? newId());
    if ('stream' in route) sent = sent.buffer(true).parse(firstEvent as unknown as Parameters<Test['parse']>[0]);
    return body === undefined ? sent : sent.send(body as object);
  };

  return {
    app,
    deps,
    people,
    otherLead: existing?.people.lead ?? (await addPerson('lead', 'Ines Marlow')),
    time,
    logged,
    send,
    async ok(name, call) {
      const response = await send(name, call);
      expect(response.status, JSON.stringify(response.body)).toBe(routes[name].status);
      return routes[name].response.parse('media' in routes[name] ? response.text : response.body) as Answer<typeof name>;
    },
    addPerson,
    async close() {
      connections.destroy();
      http.closeAllConnections();
      await new Promise((closed) => http.close(closed));
      await deps.live.close();
      if (!existing) await fresh.drop();
      rmSync(dataDir, { recursive: true, force: true });
    },
  };
}

/** The problem that an answer holds: RFC 9457, with nothing of the server's inside in it. */
export function problemIn(response: { status: number; type: string; body: unknown; text: string }): Problem & { kind: string } {
  expect(response.type).toBe('application/problem+json');
  const problem = problemSchema.parse(response.body);
  expect(problem.status).toBe(response.status);
  expect(response.text).not.toMatch(/\bat .+:\d+:\d+|node_modules|\bselect\b .* \bfrom\b|stack/i);
  return { ...problem, kind: problem.type.replace('urn:refettle:problem:', '') };
}
