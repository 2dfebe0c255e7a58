import { join } from 'node:path';
import express, { type Express } from 'express';
import helmet from 'helmet';
import type { Logger } from 'pino';
import { pinoHttp } from 'pino-http';
import { v7 as newId } from 'uuid';
import { ownOrigin } from './auth/origin.js';
import { rateLimits } from './auth/rate-limits.js';
import type { Config } from './config.js';
import type { Db } from './db.js';
import { NotFoundError } from './errors.js';
import { registerAuditRoutes } from './features/audit/audit-routes.js';
import { registerBenchRoutes } from './features/benches/benches-routes.js';
import { whoSignsOn } from './features/benches/sign-on-service.js';
import { registerCaptureRoutes } from './features/captures/captures-routes.js';
import { registerHealthRoutes } from './features/health/health-routes.js';
import type { LiveHub } from './features/live/live-hub.js';
import { registerLiveRoutes } from './features/live/live-routes.js';
import { registerPeopleRoutes } from './features/people/people-routes.js';
import { registerReadingRoutes } from './features/readings/readings-routes.js';
import { registerRunRoutes } from './features/runs/runs-routes.js';
import { registerSessionRoutes } from './features/sessions/sessions-routes.js';
import { registerSheetRoutes } from './features/sheets/sheets-routes.js';
import type { SigningKey } from './features/tags/signing-key.js';
import { registerTagRoutes } from './features/tags/tags-routes.js';
import { registerUnitRoutes } from './features/units/units-routes.js';
import { loggedError } from './logged-error.js';
import { OPENAPI_PATH, openApiDocument } from './openapi.js';
import { sendProblem } from './problem.js';
import { refuseOtherMethods, routesOn, streamsOn } from './route.js';

export interface AppDependencies {
  db: Db;
  config: Config;
  /** The key that signs now. Asked each time: it may be rotated while the server runs. */
  signingKey: () => Promise<SigningKey>;
  clock: () => Date;
  /** Hears what benches tell, whichever server they tell it to. */
  live: LiveHub;
  /** The built web; undefined: the API alone. */
  webDir: string | undefined;
  log: Logger;
}

const ONE_YEAR_MS = 31_536_000_000;

export function createApp(deps: AppDependencies): Express {
  const app = express();
  const { publicUrl, tls } = deps.config;
  // A proxy may end TLS and say for whom; nobody else is believed.
  app.set('trust proxy', deps.config.trustedProxies);
  app.set('query parser', 'simple');
  app.use(requestLog(deps.log));
  const headers = {
    https: helmet(securityHeaders({ https: true, only: tls !== undefined })),
    http: helmet(securityHeaders({ https: false })),
  };
  app.use((request, response, next) => {
    request.overHttps = ownOrigin(request, publicUrl).startsWith('https:');
    (request.overHttps ? headers.https : headers.http)(request, response, next);
  });
  app.use('/api', (_request, response, next) => {
    response.set('Cache-Control', 'no-store');
    next();
  });
  app.set('etag', false);

  const route = routesOn(app, deps);
  const limits = rateLimits((body) => whoSignsOn(deps.db, body));
  const openApi = openApiDocument();
  app.get(OPENAPI_PATH, (_request, response) => {
    response.json(openApi);
  });
  registerHealthRoutes(route);
  registerSessionRoutes(route, deps, limits);
  registerPeopleRoutes(route, deps, limits);
  registerAuditRoutes(route, deps);
  registerBenchRoutes(route, limits);
  registerSheetRoutes(route);
  registerUnitRoutes(route);
  registerCaptureRoutes(route);
  registerReadingRoutes(route);
  registerRunRoutes(route);
  registerTagRoutes(route, deps, limits);
  registerLiveRoutes(route, streamsOn(app, deps), deps);
  refuseOtherMethods(app);
  app.use('/api', (request) => {
    throw new NotFoundError(`There is no ${request.method} ${request.baseUrl}${request.path}.`);
  });
  if (deps.webDir !== undefined) serveWeb(app, deps.webDir);
  app.use(() => {
    throw new NotFoundError('There is nothing at this address.');
  });
  app.use(sendProblem);
  return app;
}

/**
 * Over plain http a browser that is told to upgrade shows a blank page. HSTS would do the same to every other door of the host name, for a
 * year: it is said only by a server that ends TLS itself and so has no plain one (`only`). A proxy in front says it where it should be said.
 */
const securityHeaders = ({ https, only = false }: { https: boolean; only?: boolean }) => ({
  contentSecurityPolicy: { directives: { upgradeInsecureRequests: https ? [] : null, imgSrc: ["'self'", 'data:', 'blob:'] } },
  strictTransportSecurity: only && { maxAge: ONE_YEAR_MS / 1000, includeSubDomains: false },
  // Browsers heed these two over https alone, and complain about them elsewhere.
  crossOriginOpenerPolicy: https,
  originAgentCluster: https,
  referrerPolicy: { policy: 'no-referrer' as const },
});

/** Who asked for what, and how it ended. Addresses without their query and headers not at all: tokens stand in both. */
const requestLog = (log: Logger) =>
  pinoHttp({
    logger: log,
    genReqId: () => newId(),
    serializers: {
      req: (request: { id: unknown; method: unknown; url?: string }) => ({
        id: request.id,
        method: request.method,
        path: request.url?.split('?')[0],
      }),
      res: (response: { statusCode: number }) => ({ status: response.statusCode }),
      err: loggedError,
    },
    customLogLevel: (_request, response) => (response.statusCode >= 500 ? 'error' : 'info'),
  });

function serveWeb(app: Express, webDir: string): void {
  app.use(
    express.static(webDir, {
      index: false,
      maxAge: ONE_YEAR_MS,
      immutable: true,
      setHeaders: (response, path) => {
        // Only what vite names by its content may be kept for ever.
        if (!path.startsWith(join(webDir, 'assets'))) response.set('Cache-Control', 'no-cache');
      },
    }),
  );
  app.get('/assets/*path', () => {
    throw new NotFoundError('There is nothing at this address.');
  });
  // Every other address is a page, and the pages are one file. `root`: the folder's own path may have a dot in it.
  app.get(['/', '/*path'], (_request, response) => {
    response.set('Cache-Control', 'no-cache').sendFile('index.html', { root: webDir, cacheControl: false });
  });
}
