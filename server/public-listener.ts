import type { IncomingMessage, RequestListener, ServerResponse } from 'node:http';
import { routes, type Route } from '../shared/api/routes.js';
import { PROBLEM_MEDIA_TYPE } from './problem.js';

/** Pages of the buyer, and the built files that any page needs; there is nothing of the shop in them. */
const PUBLIC_PAGES = [/^\/t(?:\/[^/]+){0,2}\/?$/, /^\/assets\/[^/]+$/, /^\/favicon\.ico$/];

/** From the route table: what a buyer's page asks for. */
const publicRoutes = (Object.values(routes) as Route[])
  .filter(({ action, method }) => action === 'public-tag.read' && method === 'GET')
  .map(({ path }) => new RegExp(`^${path.replace(/:\w+/g, '[^/]+')}$`));

/** Whether somebody from outside may ask for this. By the address as it was sent: what is written strangely is not let through. */
export function isPublic(method: string | undefined, url: string | undefined): boolean {
  if (method !== 'GET' && method !== 'HEAD') return false;
  const path = url?.split('?')[0] ?? '';
  if (!path.startsWith('/') || /\/\.{1,2}(?:\/|$)|\\|\/\/|%2f|%5c|%2e/i.test(path)) return false;
  return [...PUBLIC_PAGES, ...publicRoutes].some((pattern) => pattern.test(path));
}

/** The same server for the street: buyers' pages and nothing else, not even a sign-in. */
export function publicOnly(app: RequestListener): RequestListener {
  return (request: IncomingMessage, response: ServerResponse) => {
    if (isPublic(request.method, request.url)) {
      // Nobody is signed in out here.
      delete request.headers.cookie;
      delete request.headers.authorization;
      app(request, response);
      return;
    }
    response.writeHead(404, { 'content-type': PROBLEM_MEDIA_TYPE, 'cache-control': 'no-store' }).end(
      JSON.stringify({
        type: 'urn:refettle:problem:not-found',
        title: 'Not there',
        status: 404,
        detail: 'There is nothing at this address.',
      }),
    );
  };
}
