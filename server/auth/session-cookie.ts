import { parse } from 'cookie';
import type { Request, Response } from 'express';
import { ownOrigin } from './origin.js';

const COOKIE = 'refettle_session';

export const sessionCookie = (request: Request): string | undefined => parse(request.headers.cookie ?? '')[COOKIE];

const attributes = (request: Request, publicUrl: string | undefined) =>
  ({ httpOnly: true, sameSite: 'strict', path: '/', secure: ownOrigin(request, publicUrl).startsWith('https:') }) as const;

export function setSessionCookie(request: Request, response: Response, publicUrl: string | undefined, token: string, expires: Date): void {
  response.cookie(COOKIE, token, { ...attributes(request, publicUrl), expires });
}

export function clearSessionCookie(request: Request, response: Response, publicUrl: string | undefined): void {
  response.clearCookie(COOKIE, attributes(request, publicUrl));
}
