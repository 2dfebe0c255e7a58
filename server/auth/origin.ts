import type { Request } from 'express';
import { OriginError } from '../errors.js';

/**
 * The origin under which the browser sees us. Behind a proxy that ends TLS, the public address says more than our own socket;
 * a shop may also reach the same server by its plain address in the house.
 */
export function ownOrigin(request: Request, publicUrl: string | undefined): string {
  // As a trusted proxy has it (X-Forwarded-Host), else the Host header; express types it as if it were always there.
  const host = (request.host as string | undefined) ?? '';
  if (publicUrl !== undefined && new URL(publicUrl).host === host.toLowerCase()) return new URL(publicUrl).origin;
  return `${request.protocol}://${host.toLowerCase()}`;
}

/**
 * A write that is let in by a cookie must come from our own pages: SameSite alone does not tell one port of a host from another.
 * Both headers are set by the browser and out of a script's reach.
 */
export function refuseOtherOrigin(request: Request, publicUrl: string | undefined): void {
  const origin = request.get('origin');
  const site = request.get('sec-fetch-site');
  if (origin !== undefined && origin.toLowerCase() !== ownOrigin(request, publicUrl))
    throw new OriginError(`It came from ${origin.slice(0, 200)}.`);
  if (site !== undefined && site !== 'same-origin') throw new OriginError('The browser says that it came from another site.');
  if (origin === undefined && site === undefined)
    throw new OriginError('It came by cookie and does not say from where: the Origin header is missing.');
}
