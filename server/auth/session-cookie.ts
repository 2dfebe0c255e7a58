import { parse } from 'cookie';
import type { Request, Response } from 'express';

/**
 * Two names, because a shop may be reached both ways under one host: a browser lets no plain http answer write over a Secure cookie of the
 * same name, and sends a cookie to every port of its host. `__Host-` (RFC 6265bis): no plain http page can have set it.
 */
export const SESSION_COOKIES = { http: 'refettle_session', https: '__Host-refettle_session' };

const nameFor = ({ overHttps }: Request): string => (overHttps ? SESSION_COOKIES.https : SESSION_COOKIES.http);

export const sessionCookie = (request: Request): string | undefined => parse(request.headers.cookie ?? '')[nameFor(request)];

const attributes = ({ overHttps }: Request) => ({ httpOnly: true, sameSite: 'strict', path: '/', secure: overHttps }) as const;

export function setSessionCookie(request: Request, response: Response, token: string, expires: Date): void {
  response.cookie(nameFor(request), token, { ...attributes(request), expires });
}

export function clearSessionCookie(request: Request, response: Response): void {
  response.clearCookie(nameFor(request), attributes(request));
}
